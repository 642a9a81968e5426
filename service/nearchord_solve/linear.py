"""The solver of linear programs: silent, on one thread, repeatable, and ended by the monitor."""

import highspy

from nearchord_solve.arrays import I64
from nearchord_solve.kernels.cells import STOP
from nearchord_solve.monitor import Monitor


class _Silent(highspy.Highs):
    """A solver that prints nothing, not even when it is made."""

    def __init__(self) -> None:
        super().__init__()  # type: ignore[no-untyped-call]

    def enableCallbacks(self) -> None:  # noqa: N802
        """Called on construction: silence comes first."""
        self.silent()
        super().enableCallbacks()  # type: ignore[no-untyped-call]


class _Watch:
    """Ends a run of the solver when the monitor says stop.  Holds the cells only, so that no cycle keeps it alive."""

    def __init__(self, cells: I64) -> None:
        self.cells = cells

    def __call__(self, event: highspy.HighsCallbackEvent) -> None:
        if self.cells[STOP] != 0:
            event.interrupt()


def quiet_solver(monitor: Monitor) -> highspy.Highs:
    """A solver without rows and columns; a program that grows is solved again from its last basis."""
    solver = _Silent()
    solver.cbSimplexInterrupt.subscribe(_Watch(monitor.cells))
    for option, value in (("threads", 1), ("parallel", "off"), ("presolve", "off"), ("random_seed", 0)):
        solver.setOptionValue(option, value)
    return solver
