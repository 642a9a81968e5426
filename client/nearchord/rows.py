"""From two columns of endpoints to the rows of the canonical form, in numpy only.

Edges in the order of the canonical form are taken over in one pass. Others become keys, u * 2^32 + v for an edge
{u, v} with u < v, which are sorted. Both go block by block, so that what lies between stays in the processor's cache:
beside the result the first takes some hundred KiB, the second 8 bytes an edge.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.errors import BadInput

BLOCK = 1 << 15
"""Edges at a time: a few columns of so many stay in a cache of the usual size."""

Column = NDArray[Any]
Keys = NDArray[np.uint64]
Rows = tuple[NDArray[np.uint64], NDArray[np.uint32]]


def rows(n: int, u: Column, v: Column) -> Rows:
    """Row pointers uint64[n + 1] and targets uint32[m] of the edges {u[i], v[i]}, both read-only.

    `u`, `v`: integer columns of one length, below 2^63. Time O(n + m) when every u[i] < v[i] and the pairs ascend,
    otherwise one sort. BadInput names the first edge that leaves the range or is a self-loop, or the first repetition.
    """
    taken = _ascending_rows(n, u, v)
    if taken is not None:
        return taken
    keys = _edge_keys(n, u, v)
    if not ascends(keys):
        keys.sort()
        if not ascends(keys):
            _name_repeated(_edge_keys(n, u, v))
    return rows_of_keys(n, keys)


def rows_of_keys(n: int, keys: Keys) -> Rows:
    """Row pointers and targets, as of `rows`, of keys that ascend strictly."""
    filling = _Filling(n, len(keys))
    for begin in _begins(keys):
        block = keys[begin : begin + BLOCK]
        filling.put(begin, (block >> np.uint64(32)).view(np.int64), block.astype(np.uint32))  # keeps the lower half
    return filling.done()


def ascends(keys: Keys) -> bool:
    """Whether every key exceeds the one before."""
    blocks = (keys[begin : begin + BLOCK + 1] for begin in _begins(keys))  # one more, to compare across blocks
    return all(bool((block[1:] > block[:-1]).all()) for block in blocks)


class _Filling:
    """Rows that are filled in canonical order."""

    def __init__(self, n: int, m: int) -> None:
        self._ends = np.zeros(n + 1, np.int64)
        self._targets = np.empty(m, np.uint32)

    def put(self, begin: int, low: Column, high: Column) -> None:
        """Edges from number `begin` on, at least one: smaller ends, which never descend, and larger ends."""
        first, last = int(low[0]), int(low[-1])
        self._ends[first + 1 : last + 2] += np.bincount(low - low[0])
        self._targets[begin : begin + len(high)] = high

    def done(self) -> Rows:
        np.cumsum(self._ends, out=self._ends)
        self._ends.flags.writeable = False
        self._targets.flags.writeable = False
        return self._ends.view(np.uint64), self._targets


def _begins(column: Column) -> Iterator[int]:
    return iter(range(0, len(column), BLOCK))


def _ascending_rows(n: int, u: Column, v: Column) -> Rows | None:
    """The rows, or None as soon as edges turn out to be in another order or direction, or out of range."""
    filling = _Filling(n, len(u))
    if len(u) and u[0] < 0:
        return None
    for begin in _begins(u):
        low, high = u[begin : begin + BLOCK + 1], v[begin : begin + BLOCK + 1]  # one more, to compare across blocks
        if int(high.max()) >= n or not _in_order(low, high):
            return None
        filling.put(begin, low[:BLOCK], high[:BLOCK])
    return filling.done()


def _in_order(low: Column, high: Column) -> bool:
    """Whether low[i] < high[i] throughout and the pairs ascend strictly."""
    rises = high[1:] > high[:-1]
    rises &= low[1:] == low[:-1]
    rises |= low[1:] > low[:-1]
    return bool(rises.all()) and bool((low < high).all())


def _edge_keys(n: int, u: Column, v: Column) -> Keys:
    """Keys of the edges in the order given; BadInput naming the first edge that leaves the range or is a loop."""
    keys = np.empty(len(u), np.uint64)
    for begin in _begins(u):
        one, other = u[begin : begin + BLOCK], v[begin : begin + BLOCK]
        low, high = np.minimum(one, other), np.maximum(one, other)
        if int(low.min()) < 0 or int(high.max()) >= n or bool((low == high).any()):
            place = begin + int(((low < 0) | (high >= n) | (low == high)).argmax())
            _refuse(n, place, int(u[place]), int(v[place]))
        block = keys[begin : begin + BLOCK]
        np.left_shift(low.astype(np.uint64), np.uint64(32), out=block)
        block |= high.astype(np.uint64)
    return keys


def _refuse(n: int, place: int, u: int, v: int) -> None:
    if u == v and 0 <= u < n:
        raise BadInput(f"edge {place} ({u}, {v}) is a self-loop", "leave it out: no vertex excludes itself")
    remedy = (
        f"the graph has vertices 0 to {n - 1}: correct the edge or raise n"
        if n
        else "the graph has no vertices: raise n"
    )
    raise BadInput(f"edge {place} ({u}, {v}) leaves the range", remedy)


def _name_repeated(keys: Keys) -> None:
    """Raise BadInput for the earliest edge that stood there before."""
    order = np.argsort(keys, kind="stable")
    again = order[1:][keys[order[1:]] == keys[order[:-1]]]
    place = int(again.min())
    first = int(np.flatnonzero(keys == keys[place])[0])
    u, v = int(keys[place]) >> 32, int(keys[place]) & 0xFFFFFFFF
    raise BadInput(f"edge {place} ({u}, {v}) repeats edge {first}", "give each edge once, in either direction")
