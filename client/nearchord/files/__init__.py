"""Graphs and weights from files, graphs to files."""

from __future__ import annotations

from os import PathLike
from typing import IO

from nearchord.graph import Graph

Source = str | PathLike[str] | IO[bytes]
FORMATS = ("csv", "dimacs", "graphml", "node-link")
LIMIT_BYTES = 2 << 30


def read(
    source: Source,
    format: str | None = None,
    scale: int | None = None,
    *,
    weights: Source | None = None,
    limit_bytes: int = LIMIT_BYTES,
) -> Graph:
    """Graph from a path or an open binary file (such as sys.stdin.buffer)."""
    raise NotImplementedError


def read_weights(source: Source, graph: Graph, scale: int | None = None, *, limit_bytes: int = LIMIT_BYTES) -> Graph:
    """`graph` under the weights of a file: one number a line, or CSV with header name,weight."""
    raise NotImplementedError


def write_dimacs(graph: Graph, target: str | PathLike[str] | IO[bytes]) -> None:
    """Writes the DIMACS edge format, with `n` lines where the graph has weights."""
    raise NotImplementedError
