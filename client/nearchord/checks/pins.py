"""Vertices named by a question, as masks, and the weights it is about."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from nearchord.checks.edges import Edges, Ints, Mask
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, Pin


@dataclass(frozen=True)
class Pins:
    """`must` and `never` of a question, bool[n] each."""

    must: Mask
    never: Mask


def pins_of(graph: Graph, question: Choice) -> Pins:
    """The pins as masks; CheckFailed where one is no vertex."""
    return Pins(mask_of(graph, question.must, "must"), mask_of(graph, question.never, "never"))


def mask_of(graph: Graph, vertices: Iterable[Pin], field: str) -> Mask:
    """Vertices, by number or name, as bool[n]."""
    mask = np.zeros(graph.n, np.bool_)
    numbers = [graph.vertex(v) if isinstance(v, str) else v for v in vertices]
    if numbers and max(numbers) >= graph.n:
        raise CheckFailed(f"{field} has vertex {max(numbers)}, but the graph has {graph.n} vertices")
    mask[numbers] = True
    return mask


def common_neighbours(edges: Edges, vertices: Mask) -> Mask:
    """Vertices outside a set that are joined to all of it; all vertices if it is empty. O(n + m)."""
    met = np.bincount(edges.u[vertices[edges.v]], minlength=edges.n)
    met += np.bincount(edges.v[vertices[edges.u]], minlength=edges.n)
    joined: Mask = (met == int(vertices.sum())) & ~vertices
    return joined


def weights_of(graph: Graph) -> Ints:
    """The weights of a graph, written down."""
    return np.ones(graph.n, np.int64) if graph.weights is None else graph.weights
