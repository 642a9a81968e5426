"""The conflict graph that a caller holds: built once, checked once, never changed."""

from __future__ import annotations

import hashlib
import struct
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from os import PathLike
from typing import IO, TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from nearchord import canonical, rows
from nearchord.errors import BadInput

if TYPE_CHECKING:
    from networkx import Graph as NetworkxGraph

HEADER = struct.Struct("<IQ")


@dataclass(frozen=True, eq=False, repr=False)
class Graph:
    """A graph in canonical form with optional weights and names; build it with `from_edges`, `from_arrays`,
    `from_networkx` or `read`, which check what they are given (the constructor itself trusts its arguments).

    `row_ptr`: uint64[n + 1], `targets`: uint32[m]; edge {u, v} with u < v stands once, in row u, as target v, and the
    targets of a row ascend. `weights`: int64[n] or None (every vertex weighs 1). `names`: n different words or None.
    `notices`: what a reader dropped or assumed, in words. All arrays are read-only.
    """

    n: int
    m: int
    row_ptr: NDArray[np.uint64]
    targets: NDArray[np.uint32]
    weights: NDArray[np.int64] | None = None
    names: tuple[str, ...] | None = None
    notices: tuple[str, ...] = ()

    @classmethod
    def from_edges(
        cls,
        n: int,
        edges: Iterable[Sequence[int]] | NDArray[Any],
        weights: Iterable[int] | NDArray[Any] | None = None,
        names: Iterable[str] | None = None,
    ) -> Graph:
        """Graph on vertices 0 to n - 1 from pairs (or an integer array of shape (m, 2)).

        BadInput names the first pair that is a self-loop, a repetition or out of range.
        """
        pairs = canonical.pair_array(edges if isinstance(edges, np.ndarray) else list(edges))
        if pairs.size == 0:
            return cls.from_arrays(n, (), (), weights, names)
        return cls.from_arrays(n, pairs[:, 0], pairs[:, 1], weights, names)

    @classmethod
    def from_arrays(
        cls,
        n: int,
        u: Sequence[int] | NDArray[Any],
        v: Sequence[int] | NDArray[Any],
        weights: Iterable[int] | NDArray[Any] | None = None,
        names: Iterable[str] | None = None,
    ) -> Graph:
        """Graph on vertices 0 to n - 1 whose i-th edge joins u[i] and v[i]; both integer arrays of one length.

        Linear in n + m when edges ascend as in the canonical form, otherwise one sort. BadInput names the first edge
        that is a self-loop, a repetition or out of range.
        """
        n = canonical.vertex_count(n)
        first, second = canonical.endpoint_column(u, "u"), canonical.endpoint_column(v, "v")
        if len(first) != len(second):
            raise BadInput(f"u has {len(first)} entries and v has {len(second)}", "give one entry of each an edge")
        row_ptr, targets = rows.rows(n, first, second)
        return cls(n, len(targets), row_ptr, targets).with_weights(weights).with_names(names)

    @classmethod
    def from_networkx(cls, graph: NetworkxGraph, weight: str | None = "weight") -> Graph:
        """Graph of a networkx graph: str(node) becomes the name, node attribute `weight` the weight (1 where a node
        has none; no weights at all when no node has it). Vertices are numbered in the order of the nodes."""
        from nearchord import exchange

        return exchange.from_networkx(graph, weight)

    @classmethod
    def read(
        cls,
        source: str | PathLike[str] | IO[bytes],
        format: str | None = None,
        scale: int | None = None,
        *,
        weights: str | PathLike[str] | IO[bytes] | None = None,
    ) -> Graph:
        """Graph from a file (a path, or an open binary file): DIMACS edge format, CSV edge list with header, GraphML or
        node-link JSON, each also gzipped; see `nearchord.files.read`. FileProblem names file and line."""
        from nearchord import files

        return files.read(source, format, scale, weights=weights)

    def with_weights(self, weights: Iterable[int] | NDArray[Any] | None) -> Graph:
        """The same graph under other weights: n whole numbers >= 0 whose sum stays below 2^62; None for all ones."""
        if weights is None:
            return self if self.weights is None else self._but(weights=None)
        listed = weights if isinstance(weights, np.ndarray | Sequence) else list(weights)
        return self._but(weights=canonical.weight_vector(self.n, listed))

    def with_names(self, names: Iterable[str] | None) -> Graph:
        """The same graph under other names: n different, non-empty words; None for no names."""
        if names is None:
            return self if self.names is None else self._but(names=None)
        return self._but(names=canonical.name_tuple(self.n, names))

    def _but(self, **changes: Any) -> Graph:
        """The same rows with other things beside them: a known address stays known."""
        graph = replace(self, **changes)
        if "address" in vars(self):
            vars(graph)["address"] = self.address
        return graph

    def to_networkx(self, weight: str = "weight") -> NetworkxGraph:
        """A networkx graph with names (or numbers from 0) as nodes and weights, if any, as node attribute `weight`."""
        from nearchord import exchange

        return exchange.to_networkx(self, weight)

    def edges(self) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
        """Both ends of every edge as int64[m] arrays, the smaller end first, in canonical order."""
        begin = self.row_ptr.view(np.int64)
        return np.repeat(np.arange(self.n, dtype=np.int64), begin[1:] - begin[:-1]), self.targets.astype(np.int64)

    def canonical(self) -> list[memoryview]:
        """The canonical form in pieces, to be sent one after the other: header, row pointers, targets."""
        header = memoryview(HEADER.pack(self.n, self.m))
        return [header, canonical.little_endian(self.row_ptr), canonical.little_endian(self.targets)]

    @cached_property
    def address(self) -> str:
        """SHA-256 of the canonical form, 64 lower-case hexadecimal digits."""
        digest = hashlib.sha256()
        for piece in self.canonical():
            digest.update(piece)
        return digest.hexdigest()

    def vertex(self, name: str) -> int:
        """Number of the vertex called `name`; KeyError when there is none."""
        return self._numbers[name]

    def label(self, vertex: int) -> str:
        """Name of a vertex, or its number from 0 where the graph has no names."""
        return str(vertex) if self.names is None else self.names[vertex]

    @cached_property
    def _numbers(self) -> dict[str, int]:
        return {name: number for number, name in enumerate(self.names or ())}

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Graph):
            return NotImplemented
        return (
            (self.n, self.m, self.names) == (other.n, other.m, other.names)
            and np.array_equal(self.row_ptr, other.row_ptr)
            and np.array_equal(self.targets, other.targets)
            and _same_weights(self.weights, other.weights)
        )

    def __hash__(self) -> int:
        return hash(self.address)

    def __repr__(self) -> str:
        extras = [word for word, there in (("weights", self.weights), ("names", self.names)) if there is not None]
        return f"<Graph n={self.n} m={self.m}{' with ' + ' and '.join(extras) if extras else ''}>"


def _same_weights(one: NDArray[np.int64] | None, other: NDArray[np.int64] | None) -> bool:
    if one is None or other is None:
        return one is other
    return np.array_equal(one, other)
