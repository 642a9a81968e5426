"""The conflict graph: flat arrays, validated once, never changed."""

from collections.abc import Callable, Iterable
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I32, I64, U32, U64
from nearchord_solve.errors import GraphError
from nearchord_solve.kernels import csr

MOST_VERTICES = 2**31 - 1


class Graph:
    """A simple undirected graph on vertices 0..n-1 in symmetric compressed rows.

    ``ptr`` int64[n+1], ``adj`` int32[2m]; row v is ``adj[ptr[v]:ptr[v+1]]``, ascending, without v.
    Both arrays are read-only.  Build one by :meth:`from_canonical` or :meth:`from_edges`.
    """

    def __init__(self, n: int, m: int, rows: Callable[[], tuple[I64, I32]]) -> None:
        """Take rows that are known to be valid when they are first needed."""
        self.n = n
        self.m = m
        self._make = rows

    @cached_property
    def _rows(self) -> tuple[I64, I32]:
        ptr, adj = self._make()
        ptr.flags.writeable = False
        adj.flags.writeable = False
        return ptr, adj

    @property
    def ptr(self) -> I64:
        """Where each row begins."""
        return self._rows[0]

    @property
    def adj(self) -> I32:
        """The rows, one after the other."""
        return self._rows[1]

    @classmethod
    def from_canonical(cls, n: int, row_ptr: U64, targets: U32) -> "Graph":
        """Build from canonical rows: each edge once, in the row of its smaller end, targets ascending.

        ``row_ptr`` uint64[n+1], ``targets`` uint32[m].  Raises GraphError naming the first offending row.
        O(n + m) time, 8m + 16n bytes.
        """
        return cls.from_symmetric(*_mirrored(n, row_ptr, targets))

    @classmethod
    def known(cls, n: int, row_ptr: U64, targets: U32) -> "Graph":
        """The same for rows that have been read before: nothing is done until they are needed.

        A sweep over a kept structure does not need them.
        """
        return cls(n, int(targets.size), lambda: _mirrored(n, row_ptr, targets))

    @classmethod
    def from_symmetric(cls, ptr: I64, adj: I32) -> "Graph":
        """Take symmetric rows that are known to be valid; the arrays become read-only."""
        ptr.flags.writeable = False
        adj.flags.writeable = False
        return cls(ptr.size - 1, adj.size // 2, lambda: (ptr, adj))

    @classmethod
    def from_edges(cls, n: int, pairs: Iterable[tuple[int, int]]) -> "Graph":
        """Build from pairs in any order and direction; repeated pairs and loops are GraphErrors."""
        listed = np.array(list(pairs), np.int64).reshape(-1, 2)
        low, high = listed.min(axis=1), listed.max(axis=1)
        if listed.size and low.min() < 0:
            raise GraphError(f"vertex {low.min()} is negative")
        order = np.lexsort((high, low))
        row_ptr = np.zeros(n + 1, np.uint64)
        if listed.size and low.max() >= n:
            raise GraphError(f"vertex {low.max()} is out of range for {n} vertices")
        row_ptr[1:] = np.cumsum(np.bincount(low, minlength=n)) if n else 0
        return cls.from_canonical(n, row_ptr, high[order].astype(np.uint32))


def _mirrored(n: int, row_ptr: U64, targets: U32) -> tuple[I64, I32]:
    """Symmetric rows of canonical ones."""
    if not 0 <= n <= MOST_VERTICES:
        raise GraphError(f"n must lie in 0..{MOST_VERTICES}, not {n}")
    if row_ptr.shape != (n + 1,):
        raise GraphError(f"expected {n + 1} row pointers, got {row_ptr.size}")
    rows = _plain(row_ptr, np.uint64).view(np.int64)
    ends = _plain(targets, np.uint32)
    smaller = np.empty(n, np.int64)
    code, row, at = csr.check_rows(n, rows, ends, smaller)
    if code != csr.FINE:
        raise _row_error(n, code, row, at, rows, ends)
    ptr = np.empty(n + 1, np.int64)
    adj = np.empty(2 * ends.size, np.int32)
    csr.mirror(n, rows, ends, smaller, ptr, adj)
    return ptr, adj


def _plain(array: NDArray[Any], dtype: type[np.generic]) -> NDArray[Any]:
    """Aligned contiguous read-only view (copied only where needed), so that kernels see one array type."""
    if array.dtype != dtype:
        raise GraphError(f"expected an array of {np.dtype(dtype).name}, got {array.dtype.name}")
    plain = np.require(array, requirements=["C", "A"]).view()
    plain.flags.writeable = False
    return plain


def _row_error(n: int, code: int, row: int, at: int, rows: I64, ends: U32) -> GraphError:
    if code == csr.BAD_POINTER:
        text = f"row {row}: row pointers must start at 0, never fall and end at {ends.size}"
    elif code == csr.BAD_RANGE:
        text = f"row {row}: target {ends[at]} is out of range for {n} vertices"
    elif ends[at] == row:
        text = f"row {row}: self-loop"
    elif ends[at] < row:
        text = f"row {row}: target {ends[at]} is smaller; an edge belongs in the row of its smaller end"
    elif at > 0 and ends[at - 1] == ends[at]:
        text = f"row {row}: target {ends[at]} is repeated"
    else:
        text = f"row {row}: target {ends[at]} is out of order"
    return GraphError(text, row)
