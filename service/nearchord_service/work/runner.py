"""A task in, an answer out: the one place that calls the solver.

Whatever a solver does short of killing its process comes back as an answer: an exception is a defect of the solver, not
of the job, and ends as BROKEN with its type and message (the traceback goes to the log). Only MemoryError passes
through, because the caller set the limit that raised it.
"""

from __future__ import annotations

import logging
import time
from collections.abc import Callable, Iterable
from dataclasses import fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord_service.model.answer import Answer
from nearchord_service.model.event import Phase
from nearchord_service.model.stage import Verdict
from nearchord_service.work import unread
from nearchord_service.work.content import graph_rows, weight_values
from nearchord_service.work.outcome import REASON_LENGTH, recorded

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from nearchord_service.work.kept import Shelf
    from nearchord_service.work.port import Task

_LOG = logging.getLogger(__name__)

_KEPT_PHASES = (Phase.ORDER, Phase.FILL, Phase.TREE)
_WORTH_SECONDS = 0.005
"""What took less is not worth a file."""


class PhaseClock:
    """Seconds by phase, in the order the phases were entered first."""

    def __init__(self, clock: Callable[[], float]) -> None:
        self._clock = clock
        self._began = self._since = clock()
        self._phase: Phase | None = Phase.READ
        self._seconds: dict[Phase, float] = {}

    def enter(self, phase: Phase | None) -> None:
        """Close the running phase and begin another (None: none)."""
        now = self._clock()
        if self._phase is not None:
            self._seconds[self._phase] = self._seconds.get(self._phase, 0.0) + now - self._since
        self._phase, self._since = phase, now

    def spent(self, phases: Iterable[Phase]) -> float:
        """Return the seconds of closed phases."""
        return sum(self._seconds.get(phase, 0.0) for phase in phases)

    def read(self) -> tuple[float, tuple[tuple[Phase, float], ...]]:
        """Stop, and return all seconds and those by phase."""
        self.enter(None)
        return self._since - self._began, tuple(self._seconds.items())


def answer(
    task: Task,
    solver: Any,
    cells: NDArray[np.int64],
    clock: Callable[[], float] = time.perf_counter,
    shelf: Shelf | None = None,
) -> Answer:
    """Solve `task` with `solver` (nearchord_solve, or a module with the same names), showing progress in `cells`.

    `cells` is int64[16], the cells of `solver.Monitor`. What earlier solves on the same graph left is taken from
    `shelf`, and what this one leaves is offered to it. Raises MemoryError, and nothing else.
    """
    watch = PhaseClock(clock)
    try:
        found = _solve(task, solver, cells, watch, shelf)
    except MemoryError:
        raise
    except Exception as error:
        _LOG.exception("job %s, attempt %d: the solver failed", task.key.job_id, task.key.attempt)
        found = Answer(Verdict.BROKEN, f"the solver failed: {type(error).__name__}: {error}"[:REASON_LENGTH])
    seconds, by_phase = watch.read()
    return replace(found, solver_version=str(solver.VERSION), seconds=seconds, phase_seconds=by_phase)


def _solve(task: Task, solver: Any, cells: NDArray[np.int64], watch: PhaseClock, shelf: Shelf | None) -> Answer:
    predicted = int(solver.predicted_bytes(task.vertices, task.edges))
    if predicted > task.budget.memory_bytes:
        return unread.answer(task, predicted)
    monitor = solver.Monitor(cells, lambda phase: watch.enter(_phase(phase.name)))
    rows = graph_rows(task.graph, task.vertices, task.edges)
    weights = None if task.weights is None else weight_values(task.weights, task.vertices, task.question.scenarios)
    rest = (weights, _budget(task, solver), task.when_over, monitor)
    question = _question(task, solver)
    if shelf is None or not _keeps(task):
        outcome = solver.solve(question, solver.Graph.from_canonical(task.vertices, *rows), *rest)
        return recorded(outcome, task.vertices)
    kept = _found(task, solver, shelf)
    read = solver.Graph.from_canonical if kept is None else solver.Graph.known
    outcome = solver.solve(question, read(task.vertices, *rows), *rest, kept)
    if outcome.kept is not None and watch.spent(_KEPT_PHASES) >= _WORTH_SECONDS:
        shelf.offer(task, outcome.kept.arrays())
    return recorded(outcome, task.vertices)


def _keeps(task: Task) -> bool:
    """Say whether the solve is about the whole graph, of which something may be kept."""
    return bool(task.graph_address) and not task.question.must and not task.question.never


def _found(task: Task, solver: Any, shelf: Shelf) -> Any:
    arrays = shelf.find(task)
    if arrays is None:
        return None
    try:
        return solver.Kept.from_arrays(task.vertices, task.edges, arrays)
    except solver.SolverError as error:
        _LOG.warning("job %s: ignoring what was kept about its graph: %s", task.key.job_id, error)
        return None


def _phase(name: str) -> Phase | None:
    return Phase[name] if name in Phase.__members__ else None


def _question(task: Task, solver: Any) -> Any:
    """Build the solver's question from what it takes, which are the fields of its class."""
    kind = solver.QUESTIONS[task.question.name.value]
    return kind(**{field.name: getattr(task.question, field.name) for field in fields(kind)})


def _budget(task: Task, solver: Any) -> Any:
    budget = task.budget
    return solver.Budget(fill=budget.fill, states=budget.states, memory=budget.memory_bytes)
