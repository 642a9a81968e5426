"""Graphs, weights and names as the bytes that are stored: their pieces, addresses and sizes."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from nearchord.canonical import little_endian
from nearchord.errors import BadInput
from nearchord.graph import HEADER, Graph
from nearchord.v1 import content_pb2


@dataclass(frozen=True, eq=False)
class Content:
    """Bytes of one kind, kept in the parts in which they lie in memory."""

    kind: content_pb2.ContentKind
    parts: Sequence[memoryview]

    @cached_property
    def size(self) -> int:
        """Length in bytes."""
        return sum(part.nbytes for part in self.parts)

    @cached_property
    def address(self) -> str:
        """SHA-256, 64 lower-case hexadecimal digits."""
        digest = hashlib.sha256()
        for part in self.parts:
            digest.update(part)
        return digest.hexdigest()

    def inline(self) -> bytes:
        """All bytes in one."""
        return b"".join(self.parts)

    def pieces(self, offset: int, piece_bytes: int) -> Iterator[memoryview]:
        """The bytes from `offset` on, at most `piece_bytes` at a time, where they lie."""
        for part in self.parts:
            start, offset = min(offset, part.nbytes), max(0, offset - part.nbytes)
            for begin in range(start, part.nbytes, piece_bytes):
                yield part[begin : begin + piece_bytes]


@dataclass(frozen=True, eq=False)
class GraphContent(Content):
    """A graph, which remembers its address."""

    graph: Graph

    @cached_property
    def address(self) -> str:
        """See `Graph.address`."""
        return self.graph.address


@dataclass(frozen=True)
class InputContent:
    """Everything that a job can carry; `graph` is None where only what stands beside a stored one is sent."""

    graph: Content | None
    weights: Content | None
    names: Content | None

    @property
    def present(self) -> list[Content]:
        """What is there, graph first."""
        return [content for content in (self.graph, self.weights, self.names) if content is not None]

    @property
    def size(self) -> int:
        """Bytes in all."""
        return sum(content.size for content in self.present)


def content_of(graph: Graph, vectors: NDArray[np.int64] | None = None) -> InputContent:
    """The stored form of a graph, its weights (or of `vectors` in their place) and its names."""
    names = None
    given = graph.weights if vectors is None else vectors
    weights = None if given is None else weight_content(given)
    if graph.names is not None:
        names = Content(content_pb2.CONTENT_KIND_NAMES, [memoryview(names_bytes(graph.names))])
    return InputContent(GraphContent(content_pb2.CONTENT_KIND_GRAPH, graph.canonical(), graph), weights, names)


def weight_content(vectors: NDArray[np.int64]) -> Content:
    """The stored form of weights or demands, int64[n], or of the scenarios int64[R, n], one after the other."""
    return Content(content_pb2.CONTENT_KIND_WEIGHTS, [little_endian(vectors.reshape(-1))])


def graph_from(data: bytes) -> Graph:
    """The graph in stored bytes, which the server has checked."""
    n, m = HEADER.unpack_from(data)
    row_ptr = np.frombuffer(data, "<u8", n + 1, HEADER.size).astype(np.uint64)
    targets = np.frombuffer(data, "<u4", m, HEADER.size + row_ptr.nbytes).astype(np.uint32)
    for array in (row_ptr, targets):
        array.flags.writeable = False
    return Graph(n, m, row_ptr, targets)


def names_bytes(names: Sequence[str]) -> bytes:
    """UTF-8, every name ended by a line feed."""
    try:
        return "".join(f"{name}\n" for name in names).encode()
    except UnicodeEncodeError as broken:
        raise BadInput(f"a name has {broken.object[broken.start]!r}, which UTF-8 cannot hold", "rename it") from None


def names_from(data: bytes) -> tuple[str, ...]:
    """The names in stored bytes."""
    return tuple(data.decode().split("\n")[:-1])
