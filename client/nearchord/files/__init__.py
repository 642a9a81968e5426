"""Graphs and weights from files, graphs to files.

Formats: `dimacs` (edge format), `csv` (edge list with header), `graphml`, `node-link` (JSON); each may be gzipped.
Self-loops and repeated edges are dropped with a counted notice; everything else that is wrong is a FileProblem that
names file, line, fault and remedy.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from os import PathLike
from typing import IO

import numpy as np
from numpy.typing import NDArray

from nearchord.errors import BadInput
from nearchord.files import csv_edges, detect, dimacs, graphml, node_link
from nearchord.files import weights as weight_files
from nearchord.files.document import LIMIT_BYTES, Document, Source, load
from nearchord.files.number import checked_scale
from nearchord.graph import Graph

__all__ = ["FORMATS", "LIMIT_BYTES", "read", "read_demands", "read_scenarios", "read_weights", "write_dimacs"]

READERS: dict[str, Callable[[Document, int], Graph]] = {
    "csv": csv_edges.read,
    "dimacs": dimacs.read,
    "graphml": graphml.read,
    "node-link": node_link.read,
}
FORMATS = tuple(READERS)
"""The names that `format` may have."""


def read(
    source: Source,
    format: str | None = None,
    scale: int | None = None,
    *,
    weights: Source | None = None,
    limit_bytes: int = LIMIT_BYTES,
) -> Graph:
    """Graph from a path or an open binary file (such as sys.stdin.buffer).

    `format`: one of FORMATS; None tells it by the suffix of the name, then by the content. `scale`: whole number by
    which all weights are multiplied, needed where they have decimals. `weights`: a file of weights, which take the
    place of those in the graph's file. `limit_bytes`: cap on the unpacked size.
    """
    factor = checked_scale(scale)
    document = load(source, limit_bytes)
    if format is not None and format not in READERS:
        raise BadInput(f"there is no format {format!r}", f"say one of {', '.join(FORMATS)}")
    graph = READERS[format or detect.format_of(document)](document, factor)
    if weights is None:
        return _said(graph, scale) if graph.weights is not None else graph
    return read_weights(weights, graph, scale, limit_bytes=limit_bytes)


def read_weights(source: Source, graph: Graph, scale: int | None = None, *, limit_bytes: int = LIMIT_BYTES) -> Graph:
    """`graph` under the weights of a file: one number a line, or CSV with header name,weight (names of the graph)."""
    factor = checked_scale(scale)
    return _said(weight_files.apply(load(source, limit_bytes), graph, factor), scale)


def read_demands(
    source: Source, graph: Graph, scale: int | None = None, *, limit_bytes: int = LIMIT_BYTES
) -> NDArray[np.int64]:
    """Demands, int64[n], from a file like one of weights: one number a line, or CSV with header name,demand."""
    return weight_files.vector(load(source, limit_bytes), graph, checked_scale(scale), "demand")


def read_scenarios(
    source: Source, graph: Graph, scale: int | None = None, *, limit_bytes: int = LIMIT_BYTES
) -> tuple[tuple[str, ...], NDArray[np.int64]]:
    """Titles of scenarios and their weight vectors, int64[R, n], from CSV: names of vertices in the first column, then
    one column a scenario under its title."""
    return weight_files.scenarios(load(source, limit_bytes), graph, checked_scale(scale))


def _said(graph: Graph, scale: int | None) -> Graph:
    if scale is None or scale == 1:
        return graph
    return replace(graph, notices=(*graph.notices, f"weights, and so values and bounds, are multiplied by {scale}"))


def write_dimacs(graph: Graph, target: str | PathLike[str] | IO[bytes]) -> None:
    """Writes the DIMACS edge format (gzipped where the path ends in `.gz`), with `n` lines where the graph has weights.

    Vertex v becomes number v + 1; names are not written, because the format has none.
    """
    dimacs.write(graph, target)
