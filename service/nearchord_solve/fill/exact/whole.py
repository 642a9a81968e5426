"""Minimum fill of a whole graph: its parts, searched together."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32
from nearchord_solve.budget import DEFAULT_MEMORY
from nearchord_solve.fill.exact.parts import Part, parts_of
from nearchord_solve.fill.exact.result import FillResult, ProofKind
from nearchord_solve.fill.exact.search import Tally, fill_of_parts
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import FILL_EDGES, FILL_LOWER
from nearchord_solve.memory import kept_bytes, search_bytes
from nearchord_solve.monitor import Monitor
from nearchord_solve.structure import Structure


@dataclass(frozen=True, eq=False)
class PartFill:
    """A part that holds fill: ``vertices`` int32, ascending; ``edges`` int32[k, 2] in vertices of the graph.

    ``result``, in numbers 0.. of the vertices, is None if the part does not fit into memory, or was not searched long
    enough; then edges and ``lower_bound`` are those of the structure.
    """

    vertices: I32
    edges: I32
    lower_bound: int
    result: FillResult | None

    @property
    def kind(self) -> ProofKind:
        """How the bound is known, NONE where the bounds are apart."""
        return ProofKind.NONE if self.result is None else self.result.proof


@dataclass(frozen=True, eq=False)
class GraphFill:
    """``edges`` int32[k, 2]: a fill in vertices of the graph, smaller end first, sorted.

    The fill number lies between ``lower_bound`` and k = ``upper_bound``.  The fill is minimal, except in parts that
    were too large to be searched or to be thinned.  ``over``: the fill number is certainly above the limit.
    """

    edges: I32
    lower_bound: int
    over: bool
    parts: tuple[PartFill, ...]

    @property
    def upper_bound(self) -> int:
        """Size of the fill found."""
        return int(self.edges.shape[0])

    @property
    def kinds(self) -> tuple[ProofKind, ...]:
        """How the bound of each part is known."""
        return tuple(part.kind for part in self.parts)


def fill_of_graph(
    graph: Graph, structure: Structure, limit: int | None, monitor: Monitor, memory: int = DEFAULT_MEMORY
) -> GraphFill:
    """Fewest edges whose addition makes a graph chordal, as far as the limit and the monitor allow.

    Searches the parts of ``structure`` that hold fill and fit into ``memory`` bytes besides it, and falls back on its
    fill.  That more than ``limit`` is needed is concluded from the search only, as its packings can be checked.
    """
    figures = structure.forest.figures
    parts = list(parts_of(graph, structure.numbering, structure.cores))
    fitting = _fitting(parts, figures[:, FILL_EDGES].tolist(), memory - structure.held_bytes)
    rows = [(parts[number].ptr, parts[number].adj) for number in fitting]
    tally = Tally(figures[fitting, FILL_EDGES].tolist(), [0] * len(fitting), monitor)
    found = dict(zip(fitting, fill_of_parts(rows, limit, monitor, tally), strict=True))
    settled = tuple(_settled(structure, number, part, found.get(number)) for number, part in enumerate(parts))
    edges = np.concatenate([np.empty((0, 2), np.int32), *(part.edges for part in settled)])
    lower = max(structure.fill_lower_bound, sum(part.lower_bound for part in settled))
    return GraphFill(edges[np.lexsort((edges[:, 1], edges[:, 0]))], lower, limit is not None and lower > limit, settled)


def _fitting(parts: Sequence[Part], fills: Sequence[int], memory: int) -> list[int]:
    """The parts that fit, the smallest first as far as memory goes; ascending."""
    free = memory - sum(part.adj.nbytes for part in parts)
    found = []
    for number in sorted(range(len(parts)), key=lambda number: parts[number].vertices.size):
        n = parts[number].vertices.size
        if search_bytes(n, parts[number].adj.size, fills[number]) > free:
            break
        free -= kept_bytes(n)
        found.append(number)
    return sorted(found)


def _settled(structure: Structure, number: int, part: Part, result: FillResult | None) -> PartFill:
    """The better of what the search found and what the structure has."""
    figures = structure.forest.figures[number]
    lower = int(figures[FILL_LOWER])
    if result is None:
        return PartFill(part.vertices, structure.core_fill(number), lower, None)
    edges = part.vertices[result.edges]
    if result.upper_bound > figures[FILL_EDGES]:
        edges = structure.core_fill(number)
    return PartFill(part.vertices, edges, max(lower, result.lower_bound), result)
