"""Weights in a file of their own: one number a line in the order of the vertices, or CSV with header `name,weight`.

Demands are written in the same way (the column may also be called `demand`). Scenarios are a CSV table: the first
column names the vertices, every other column is a weight vector, titled by the header.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from nearchord import canonical
from nearchord.errors import BadInput
from nearchord.files.csv_edges import SEPARATORS, Rows
from nearchord.files.document import Document
from nearchord.files.number import weight_from
from nearchord.graph import Graph


def apply(document: Document, graph: Graph, scale: int) -> Graph:
    """`graph` under the weights of a document; FileProblem names the line that is wrong."""
    return graph.with_weights(vector(document, graph, scale, "weight"))


def vector(document: Document, graph: Graph, scale: int, what: str) -> NDArray[np.int64]:
    """One number a vertex, int64[n]; `what` is what messages call it. FileProblem names the line that is wrong."""
    first = next((line for line in document.data.decode().splitlines() if line.strip()), "")
    listed = any(mark in first for mark in SEPARATORS)
    found = (_by_name if listed else _in_order)(document, graph, scale, what)
    try:
        return canonical.weight_vector(graph.n, found, what)
    except BadInput as wrong:
        raise document.problem(None, wrong.problem, wrong.remedy) from None


def _in_order(document: Document, graph: Graph, scale: int, what: str) -> list[int]:
    weights: list[int] = []
    for line, text in enumerate(document.data.decode().split("\n"), 1):
        if not text.strip():
            continue
        try:
            weights.append(weight_from(text, scale, what))
        except BadInput as wrong:
            raise document.problem(line, wrong.problem, wrong.remedy) from None
    if len(weights) != graph.n:
        raise document.problem(
            None,
            f"there are {len(weights)} {what}s, but the graph has {graph.n} vertices",
            "give one a line and vertex",
        )
    return weights


def _by_name(document: Document, graph: Graph, scale: int, what: str) -> list[int]:
    rows = Rows(document)
    column = rows.column(what if what in rows.header else "weight")
    return [of[0] for of in _table(document, rows, graph, rows.column("name"), [column], scale, what)]


def scenarios(document: Document, graph: Graph, scale: int) -> tuple[tuple[str, ...], NDArray[np.int64]]:
    """The titles of the scenarios and their weight vectors, int64[R, n]; FileProblem names the line that is wrong."""
    rows = Rows(document)
    titles = tuple(rows.header_as_written[1:])
    if not titles:
        raise document.problem(1, "the header has no scenario", "give a column of names, then one column a scenario")
    if len(set(titles)) < len(titles) or "" in titles:
        raise document.problem(1, "the header does not give every scenario a title of its own", "name each column once")
    table = _table(document, rows, graph, 0, list(range(1, len(titles) + 1)), scale, "weight")
    return titles, np.array(table, np.int64).reshape(graph.n, len(titles)).T.copy()


def _table(
    document: Document, rows: Rows, graph: Graph, name_column: int, columns: list[int], scale: int, what: str
) -> list[list[int]]:
    """The numbers in some columns, vertex by vertex: each has to have one row."""
    numbers = {graph.label(vertex): vertex for vertex in range(graph.n)}
    found: list[list[int] | None] = [None] * graph.n
    for row in rows:
        vertex = _vertex(rows, numbers, row[name_column].strip())
        if found[vertex] is not None:
            raise rows.problem(f"{graph.label(vertex)!r} has a {what} already", "keep one row a vertex")
        try:
            found[vertex] = [weight_from(row[column], scale, what) for column in columns]
        except BadInput as wrong:
            raise rows.problem(wrong.problem, wrong.remedy) from None
    if None in found:
        missing = graph.label(found.index(None))
        raise document.problem(
            None, f"vertex {missing!r} has no {what}", f"add a row for it: {missing}{',1' * len(columns[:3])}"
        )
    return [of for of in found if of is not None]


def _vertex(rows: Rows, numbers: dict[str, int], name: str) -> int:
    if name not in numbers:
        remedy = "correct the name, or declare the vertex in the graph"
        raise rows.problem(f"{name!r} is no vertex of the graph", remedy)
    return numbers[name]
