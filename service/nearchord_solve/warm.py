"""Compiling everything before the first job."""

from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.budget import DEFAULT_MEMORY, DEFAULT_STATES, Budget
from nearchord_solve.fill import find_cores, triangulate
from nearchord_solve.fill.exact.rehearse import rehearse, rehearse_whole
from nearchord_solve.fill.kernels.triangulate import best_triangulation
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Kept
from nearchord_solve.monitor import Monitor, Phase, Stop
from nearchord_solve.order import Unfinished, eliminate, rank, rank_by_degree
from nearchord_solve.questions import (
    Clique,
    ColourableSubgraph,
    Colouring,
    Fill,
    FractionalColouring,
    IndependentSet,
    InducedForest,
    Structure,
    VertexCover,
)
from nearchord_solve.solving import solve

Report = Callable[[int, int], None]


def warm_up(report: Report | None = None, part: str | None = None) -> None:
    """Run tiny solves that together call every kernel with the production types; only one ``part`` of them if named.

    Afterwards nothing of it is compiled any more, in this process or, through numba's disk cache, in later ones.  Cold,
    all parts take two and a half minutes of processor time.  ``report(done, total)`` hears of each stage.
    """
    heard = report if report is not None else lambda done, total: None
    wanted = WARM_PARTS if part is None else (part,)
    total = sum(PARTS[name][1] for name in wanted)
    heard(0, total)
    done = 0
    for name in wanted:
        for _ in PARTS[name][0]():
            done += 1
            heard(done, total)


def _choosing() -> Iterator[None]:
    """The way from a graph to its structure, and whatever else needs all of it; stage by stage, so that whoever waits
    sees it go on."""
    square = _square()
    monitor = Monitor()
    yield
    rank_by_degree(square, 10**3, monitor)
    yield
    ranking = rank(square, monitor)
    assert not isinstance(ranking, Unfinished)
    yield
    numbering = eliminate(ranking, square.m, monitor)
    assert not isinstance(numbering, Unfinished)
    yield
    cores = find_cores(numbering, monitor)
    assert not isinstance(cores, Unfinished)
    yield
    rows = np.zeros((1, 1), np.uint64)
    best_triangulation(rows, rows.copy(), 0, 0, 1, True, monitor.cells)
    yield
    triangulate(numbering, cores, 1, False, monitor)
    yield
    solve(IndependentSet(), square, None, Budget(), "bound", monitor)
    yield
    solve(VertexCover(must=(0,), never=(3,)), _braced_ring(6), None, Budget(fill=0), "stop", monitor)
    yield
    solve(IndependentSet(), _braced_ring(7), None, Budget(states=1), "bound", monitor)
    yield
    solve(IndependentSet(), square, None, Budget(memory=1), "bound", monitor)
    monitor = Monitor(on_phase=lambda phase: _stop_in_fill(monitor, phase))
    solve(IndependentSet(), square, None, Budget(), "bound", monitor)
    yield
    yield from _serving()
    rehearse_whole()
    solve(Fill(), square, None, Budget(), "bound", Monitor())
    yield


def _adding() -> Iterator[None]:
    """What independent sets can be asked besides."""
    known = _known_square()
    ones = np.ones((2, 5), np.int64)
    asked = (
        (IndependentSet(prices=True), None),
        (IndependentSet(conflict_prices=True), None),
        (IndependentSet(scenarios=2), ones),
        (IndependentSet(best=100, count=True), None),
    )
    for question, weights in asked:
        solve(question, _square(), weights, Budget(), "bound", Monitor(), known)
        yield


def _labelling() -> Iterator[None]:
    """Cliques, colours and forests."""
    known = _known_square()
    for question in (Clique(), InducedForest(prices=True), ColourableSubgraph(2, prices=True), ColourableSubgraph(3)):
        solve(question, _square(), None, Budget(), "bound", Monitor(), known)
        solve(question, _square(), None, Budget(memory=1), "bound", Monitor())
        yield


def _serving() -> Iterator[None]:
    """Plans that serve everybody: a graph that keeps all steps busy, as it needs two colours more than a clique has."""
    ring = [(v, (v + 1) % 5) for v in range(5)]
    crown = [(a, b + 5) for u, v in ring for a, b in ((u, v), (v, u))]
    pairs = [(min(pair), max(pair)) for pair in [*ring, *crown, *((v, 10) for v in range(5, 10))]]
    for question in (Colouring(), FractionalColouring()):
        solve(question, Graph.from_edges(11, sorted(pairs)), None, Budget(), "bound", Monitor())
        yield


def _filling() -> Iterator[None]:
    """The exact search, recognition, and what each question would cost."""
    yield from rehearse()
    solve(Structure(), _square(), None, Budget(), "bound", Monitor(), _known_square())
    yield


def _square() -> Graph:
    return Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4)])


def _stop_in_fill(monitor: Monitor, phase: Phase) -> None:
    if phase is Phase.FILL:
        monitor.cells[Monitor.STOP] = Stop.SECONDS


def _known_square() -> Kept:
    """The structure of a square with a tail, 0-1-2-3 and 4 at 3, with the fill edge 0-2, as a solve would keep it.

    Parts that start from it need not compile how it is found, which another part does at the same time.
    """
    header = np.array([5, 5, -1, DEFAULT_STATES, DEFAULT_MEMORY, 1, 1, 2], np.int64)
    long = {
        "low_ptr": [0, 0, 1, 2, 3, 5],
        "fill_end": [1, 1, 1, 1, 0, 0],
        "core_ptr": [0, 2],
        "core_slot": [0, 4],
        "core_bag": [0, 2],
        "figures": [1, 1, 10, 3, 1, 0],
        "slot_fill_ptr": [0, 0, 0, 1, 1],
        "bag_ptr": [0, 3, 6],
    }
    short = {
        "order": [0, 3, 4, 2, 1],
        "low": [0, 1, 1, 0, 3],
        "parent": [-1, 0, 1, 1, 3],
        "fill": [0],
        "core": [-1, -1, -1, 0, 0],
        "core_place": [3, 4],
        "core_top": [3],
        "core_anchors": [2],
        "slot_place": [0, 1, 3, 4],
        "slot_fill": [0],
        "bag_slot": [0, 1, 2, 0, 2, 3],
        "bag_adhesion": [2, 2],
        "bag_above": [-1, 0],
    }
    arrays: dict[str, NDArray[Any]] = {"header": header, "bag_kind": np.array([1, 3], np.uint8)}
    arrays.update({name: np.array(values, np.int64) for name, values in long.items()})
    arrays.update({name: np.array(values, np.int32) for name, values in short.items()})
    return Kept.from_arrays(5, 5, arrays)


def _braced_ring(n: int) -> Graph:
    """A cycle in which also every second vertex is linked, and a tail."""
    pairs = {(min(v, u), max(v, u)) for v in range(n) for u in ((v + 1) % n, (v + 2) % n)}
    return Graph.from_edges(n + 1, [*sorted(pairs), (n - 1, n)])


PARTS: dict[str, tuple[Callable[[], Iterator[None]], int]] = {
    "adding": (_adding, 4),
    "choosing": (_choosing, 14),
    "filling": (_filling, 6),
    "labelling": (_labelling, 4),
}
"""Name of a part: its stages one by one, and how many they are."""
WARM_PARTS = tuple(PARTS)
"""Parts of the warm-up that can be compiled side by side; what they share is compiled by whoever comes first."""
