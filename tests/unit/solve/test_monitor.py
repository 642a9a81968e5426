"""The cells shared with a watcher."""

import nearchord_solve
import numpy as np
import pytest
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Phase, SolverError, Stop, solve


def test_unknown_figures_are_minus_one() -> None:
    monitor = Monitor()
    unknown = [Monitor.FILL, Monitor.FILL_LOWER, Monitor.BAGS_DONE, Monitor.BAGS, Monitor.STATES]
    assert monitor.cells[unknown].tolist() == [-1] * 5
    assert monitor.cells[[Monitor.HAS_INCUMBENT, Monitor.HAS_BOUND]].tolist() == [0, 0]


def test_a_stop_written_before_the_solve_is_kept() -> None:
    cells = np.zeros(16, np.int64)
    cells[Monitor.STOP] = Stop.CANCEL
    assert Monitor(cells).stop is Stop.CANCEL


@pytest.mark.parametrize("cells", [np.zeros(15, np.int64), np.zeros(16, np.int32), np.zeros(32, np.int64)[::2]])
def test_other_cells_are_refused(cells: np.ndarray) -> None:
    with pytest.raises(SolverError, match=r"monitor\.cells"):
        Monitor(cells)


def test_phases_come_in_order_and_the_last_cells_tell_the_answer() -> None:
    seen: list[Phase] = []
    monitor = Monitor(on_phase=seen.append)
    square = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)])
    outcome = solve(IndependentSet(), square, np.array([3, 1, 4, 1]), Budget(), "bound", monitor)
    assert seen == sorted(seen)
    assert seen[0] is Phase.READ
    assert seen[-1] is Phase.DONE
    cells = monitor.cells
    assert cells[[Monitor.INCUMBENT, Monitor.BOUND]].tolist() == [outcome.value, outcome.bound] == [7, 7]
    assert cells[[Monitor.FILL, Monitor.FILL_LOWER, Monitor.BAGS, Monitor.BAGS_DONE]].tolist() == [1, 1, 2, 2]


def test_exports_are_sorted_and_complete() -> None:
    """Constants, then classes, then functions, each by name, as the linter sorts them."""

    def kind(name: str) -> tuple[int, str]:
        return (0 if name.isupper() else 1 if name[0].isupper() else 2), name

    assert nearchord_solve.__all__ == sorted(nearchord_solve.__all__, key=kind)
    assert all(hasattr(nearchord_solve, name) for name in nearchord_solve.__all__)


def test_warm_up_reports_each_step_and_compiles_everything() -> None:
    from nearchord_solve.sweep.kernels import passes as sweep

    reports: list[tuple[int, int]] = []
    nearchord_solve.warm_up(lambda done, total: reports.append((done, total)))
    total = reports[0][1]
    assert [done for done, _ in reports] == list(range(total + 1))
    compiled = len(sweep.inward.signatures)
    graph = Graph.from_canonical(3, np.array([0, 1, 2, 2], np.uint64), np.array([1, 2], np.uint32))
    solve(IndependentSet(must=(0,)), graph, np.array([1, 2, 3]), Budget(), "stop", Monitor())
    assert len(sweep.inward.signatures) == compiled
