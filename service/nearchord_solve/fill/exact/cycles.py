"""Cuts: cycles that need chords.

Let C be a cycle on c >= 4 vertices of which no chord is an edge of the graph, and let K of its sides be non-edges.
A triangulation that contains all K sides contains c - 3 chords of C (a triangulated c-gon has that many), so with
x = 1 on fill edges and 0 elsewhere

    sum of x over the chords of C  >=  (c - 3) (1 - sum over the K sides of (1 - x)).

For K = 0 these are the chordless cycles of the graph.  The separation looks for violated cuts at a point x: all
4-cycles exactly, longer ones among shortest paths in the graph with the pairs of x >= some threshold added.
"""

import numpy as np

from nearchord_solve.arrays import F64, I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.kernels.chordless import adjacency, four_cycles, long_cycles, round_up
from nearchord_solve.fill.exact.words import rows_of

Cycle = tuple[int, ...]

LEAST_VIOLATION = 1e-4


def canonical(cycle: list[int]) -> Cycle:
    """The rotation and direction that starts at the lowest vertex and goes to its lower neighbour."""
    at = cycle.index(min(cycle))
    turned = cycle[at:] + cycle[:at]
    if turned[1] > turned[-1]:
        turned = [turned[0], *reversed(turned[1:])]
    return tuple(turned)


def violated(core: Core, x: F64, thresholds: tuple[float, ...], enough: int, cells: I64) -> list[Cycle]:
    """Cycles whose cuts are violated at ``x`` float64[n, n] (symmetric, 0 on edges), the worst first.

    Thresholds are tried in turn until ``enough`` are found.
    """
    graph = rows_of(core.adj)
    present = np.maximum(x, adjacency(graph))
    found: dict[Cycle, float] = {}
    room = np.empty((core.n * core.n, 4), np.int64)
    gain = np.empty(core.n * core.n, np.float64)
    count = four_cycles(graph, present, LEAST_VIOLATION, room, gain)
    for vertices, value in zip(room[:count].tolist(), gain[:count].tolist(), strict=True):
        found[canonical(vertices)] = value
    for threshold in thresholds:
        rounded = graph.copy()
        round_up(present, threshold, rounded)
        flat, ends, gains = long_cycles(rounded, present, LEAST_VIOLATION, cells)
        start = 0
        for end, value in zip(ends.tolist(), gains.tolist(), strict=True):
            found[canonical(flat[start:end].tolist())] = value
            start = end
        if len(found) >= enough:
            break
    return sorted(found, key=lambda cycle: (-found[cycle], cycle))
