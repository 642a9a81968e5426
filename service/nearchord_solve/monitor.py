"""What a solve shows while it runs, and how it is told to stop.

One int64 array of sixteen cells is shared by the solver, which writes it, and a watcher, which reads it and
writes only ``STOP``.  The array may live in shared memory.  There are no locks: each cell is one aligned word,
and a watcher tolerates seeing cells of neighbouring moments together.
"""

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from enum import IntEnum
from typing import ClassVar

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.errors import SolverError


class Stop(IntEnum):
    """Why a running solve should end early."""

    NONE = 0
    SECONDS = 1
    CANCEL = 2


class Phase(IntEnum):
    """Where a solve is; phases come in this order, some are skipped; a hard graph is ordered twice, and a search for
    less fill goes through FILL, IMPROVE and TREE again."""

    READ = 0
    ORDER = 1
    FILL = 2
    TREE = 3
    SWEEP = 4
    IMPROVE = 5
    DONE = 6


class Monitor:
    """The shared cells of one solve.

    ``STEP`` of ``STEPS`` is the fraction done within the phase.  ``FILL``, ``FILL_LOWER``, ``BAGS_DONE``,
    ``BAGS`` and ``STATES`` are -1 while unknown.  ``INCUMBENT`` counts when ``HAS_INCUMBENT`` is 1, ``BOUND``
    when ``HAS_BOUND`` is 1; both speak of the question's own value.
    """

    CELLS: ClassVar[int] = 16
    STOP: ClassVar[int] = 0
    PHASE: ClassVar[int] = 1
    STEP: ClassVar[int] = 2
    STEPS: ClassVar[int] = 3
    FILL: ClassVar[int] = 4
    FILL_LOWER: ClassVar[int] = 5
    BAGS_DONE: ClassVar[int] = 6
    BAGS: ClassVar[int] = 7
    STATES: ClassVar[int] = 8
    HAS_INCUMBENT: ClassVar[int] = 9
    INCUMBENT: ClassVar[int] = 10
    HAS_BOUND: ClassVar[int] = 11
    BOUND: ClassVar[int] = 12

    def __init__(self, cells: I64 | None = None, on_phase: Callable[[Phase], None] | None = None) -> None:
        """Take ``cells`` (int64[16], contiguous, writable; a new array if None) and reset all but STOP."""
        if cells is None:
            cells = np.zeros(self.CELLS, np.int64)
        elif cells.dtype != np.int64 or cells.shape != (self.CELLS,) or not cells.flags.carray:
            raise SolverError("monitor.cells", f"must be a writable contiguous int64 array of {self.CELLS}")
        self.cells = cells
        self.on_phase = on_phase
        cells[1:] = 0
        cells[self.FILL : self.STATES + 1] = -1

    @property
    def stop(self) -> Stop:
        """What the watcher asks for now."""
        return Stop(int(self.cells[self.STOP]))

    def enter(self, phase: Phase, steps: int = 0) -> None:
        """Begin ``phase`` of ``steps`` steps (0 if not known) and tell ``on_phase``."""
        self.cells[self.STEP] = 0
        self.cells[self.STEPS] = steps
        self.cells[self.PHASE] = int(phase)
        if self.on_phase is not None:
            self.on_phase(phase)

    @contextmanager
    def aside(self) -> Iterator["Monitor"]:
        """A monitor for a sub-problem: it sees STOP, tells nobody of phases, and leaves the cells as they were.

        While it is in use a watcher may see figures of the sub-problem.
        """
        kept = self.cells[1:].copy()
        quiet = Aside.__new__(Aside)
        quiet.cells, quiet.on_phase = self.cells, None
        try:
            yield quiet
        finally:
            self.cells[1:] = kept

    def incumbent(self, value: int) -> None:
        """Record the value of the best feasible answer so far."""
        self.cells[self.INCUMBENT] = value
        self.cells[self.HAS_INCUMBENT] = 1

    def bound(self, value: int) -> None:
        """Record the best bound so far."""
        self.cells[self.BOUND] = value
        self.cells[self.HAS_BOUND] = 1


class Aside(Monitor):
    """What :meth:`Monitor.aside` gives."""

    def enter(self, phase: Phase, steps: int = 0) -> None:
        """Keep the phase of the whole."""
