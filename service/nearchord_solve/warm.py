"""Compiling everything before the first job."""

from collections.abc import Callable

import numpy as np

from .arrays import I64
from .budget import Budget
from .graph import Graph
from .monitor import Monitor, Stop
from .questions import IndependentSet, VertexCover
from .solving import solve

Report = Callable[[int, int], None]


def warm_up(report: Report | None = None) -> None:
    """Run tiny solves that together call every kernel with the production types.

    Afterwards nothing is compiled any more, in this process or, through numba's disk cache, in later ones.
    ``report(done, total)`` hears of each of them.
    """
    steps: list[Callable[[], object]] = [
        lambda: _ring(4),
        lambda: _solve(_ring(4), Budget()),
        lambda: _solve(_ring(7), Budget(states=1)),
        lambda: _solve(_ring(5), Budget(memory=1)),
        lambda: _pinned(_ring(6)),
        lambda: _stopped(_ring(6)),
    ]
    for done, step in enumerate(steps):
        if report is not None:
            report(done, len(steps))
        step()
    if report is not None:
        report(len(steps), len(steps))


def _ring(n: int) -> Graph:
    """A cycle with a chord from each vertex to the one after the next, and a tail."""
    pairs = {tuple(sorted((v, (v + step) % n))) for v in range(n) for step in (1, 2)}
    if n == 4:
        pairs = {(0, 1), (1, 2), (2, 3), (0, 3)}
    return Graph.from_edges(n + 1, [*((a, b) for a, b in pairs), (n - 1, n)])


def _ones(graph: Graph) -> I64:
    return np.ones(graph.n, np.int64)


def _solve(graph: Graph, budget: Budget) -> None:
    solve(IndependentSet(), graph, _ones(graph), budget, "bound", Monitor())


def _pinned(graph: Graph) -> None:
    solve(VertexCover(must=(0,), never=(3,)), graph, None, Budget(fill=0), "stop", Monitor())


def _stopped(graph: Graph) -> None:
    monitor = Monitor()
    monitor.cells[Monitor.STOP] = Stop.SECONDS
    solve(IndependentSet(), graph, None, Budget(), "bound", monitor)
