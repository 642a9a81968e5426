"""Weights in a file of their own: one number a line in the order of the vertices, or CSV with header `name,weight`."""

from __future__ import annotations

from nearchord.errors import BadInput
from nearchord.files.csv_edges import SEPARATORS, Rows
from nearchord.files.document import Document
from nearchord.files.number import weight_from
from nearchord.graph import Graph


def apply(document: Document, graph: Graph, scale: int) -> Graph:
    """`graph` under the weights of a document; FileProblem names the line that is wrong."""
    first = next((line for line in document.data.decode().splitlines() if line.strip()), "")
    listed = any(mark in first for mark in SEPARATORS)
    weights = _by_name(document, graph, scale) if listed else _in_order(document, graph, scale)
    try:
        return graph.with_weights(weights)
    except BadInput as wrong:
        raise document.problem(None, wrong.problem, wrong.remedy) from None


def _in_order(document: Document, graph: Graph, scale: int) -> list[int]:
    weights: list[int] = []
    for line, text in enumerate(document.data.decode().split("\n"), 1):
        if not text.strip():
            continue
        try:
            weights.append(weight_from(text, scale))
        except BadInput as wrong:
            raise document.problem(line, wrong.problem, wrong.remedy) from None
    if len(weights) != graph.n:
        raise document.problem(
            None,
            f"there are {len(weights)} weights, but the graph has {graph.n} vertices",
            "give one a line and vertex",
        )
    return weights


def _by_name(document: Document, graph: Graph, scale: int) -> list[int]:
    rows = Rows(document)
    name_column, weight_column = rows.column("name"), rows.column("weight")
    numbers = {graph.label(vertex): vertex for vertex in range(graph.n)}
    weights: list[int | None] = [None] * graph.n
    for row in rows:
        name = row[name_column].strip()
        if name not in numbers:
            raise rows.problem(
                f"{name!r} is no vertex of the graph", "correct the name, or declare the vertex in the graph"
            )
        if weights[numbers[name]] is not None:
            raise rows.problem(f"{name!r} has a weight already", "keep one row a vertex")
        try:
            weights[numbers[name]] = weight_from(row[weight_column], scale)
        except BadInput as wrong:
            raise rows.problem(wrong.problem, wrong.remedy) from None
    if None in weights:
        missing = graph.label(weights.index(None))
        raise document.problem(None, f"vertex {missing!r} has no weight", f"add a row for it: {missing},1")
    return [weight for weight in weights if weight is not None]
