"""A task in, an answer out: the one place that calls the solver.

Whatever a solver does short of killing its process comes back as an answer: an exception is a defect of the solver, not
of the job, and ends as BROKEN with its type and message (the traceback goes to the log). Only MemoryError passes
through, because the caller set the limit that raised it.
"""

from __future__ import annotations

import logging
import time
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord_service.model.answer import Answer, Column, ElementType, ProofKind
from nearchord_service.model.event import Phase
from nearchord_service.model.stage import Verdict
from nearchord_service.work import unread
from nearchord_service.work.content import graph_rows, weight_values

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from nearchord_service.work.port import Task

REASON_LENGTH = 2000
_LOG = logging.getLogger(__name__)


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

    def read(self) -> tuple[float, tuple[tuple[Phase, float], ...]]:
        """Stop, and return all seconds and those by phase."""
        self.enter(None)
        return self._since - self._began, tuple(self._seconds.items())


def answer(task: Task, solver: Any, cells: NDArray[np.int64], clock: Callable[[], float] = time.perf_counter) -> Answer:
    """Solve `task` with `solver` (nearchord_solve, or a module with the same names), showing progress in `cells`.

    `cells` is int64[16], the cells of `solver.Monitor`. Raises MemoryError, and nothing else.
    """
    watch = PhaseClock(clock)
    try:
        found = _solve(task, solver, cells, watch)
    except MemoryError:
        raise
    except Exception as error:
        _LOG.exception("job %s, attempt %d: the solver failed", task.key.job_id, task.key.attempt)
        found = Answer(Verdict.BROKEN, f"the solver failed: {type(error).__name__}: {error}"[:REASON_LENGTH])
    seconds, by_phase = watch.read()
    return replace(found, solver_version=str(solver.VERSION), seconds=seconds, phase_seconds=by_phase)


def _solve(task: Task, solver: Any, cells: NDArray[np.int64], watch: PhaseClock) -> Answer:
    predicted = int(solver.predicted_bytes(task.vertices, task.edges))
    if predicted > task.budget.memory_bytes:
        return unread.answer(task, predicted)
    monitor = solver.Monitor(cells, lambda phase: watch.enter(_phase(phase.name)))
    graph = solver.Graph.from_canonical(task.vertices, *graph_rows(task.graph, task.vertices, task.edges))
    weights = None if task.weights is None else weight_values(task.weights, task.vertices)
    outcome = solver.solve(_question(task, solver), graph, weights, _budget(task, solver), task.when_over, monitor)
    return _recorded(outcome, task.vertices)


def _phase(name: str) -> Phase | None:
    return Phase[name] if name in Phase.__members__ else None


def _question(task: Task, solver: Any) -> Any:
    return solver.QUESTIONS[task.question.name.value](must=task.question.must, never=task.question.never)


def _budget(task: Task, solver: Any) -> Any:
    budget = task.budget
    return solver.Budget(fill=budget.fill, states=budget.states, memory=budget.memory_bytes)


def _recorded(outcome: Any, vertices: int) -> Answer:
    verdict = Verdict(outcome.verdict.value)
    chosen = None if verdict is Verdict.CANCELLED else outcome.chosen
    return Answer(
        verdict=verdict,
        reason=str(outcome.reason)[:REASON_LENGTH] or f"the solver gave no reason for {verdict}",
        value=None if chosen is None else _exact(outcome.value),
        bound=_exact(outcome.bound),
        fill=_count(outcome.fill),
        fill_lower_bound=_count(outcome.fill_lower_bound),
        states=_count(outcome.states),
        bags=_count(outcome.bags),
        largest_bag=_count(outcome.largest_bag),
        parts=_count(outcome.parts),
        fill_cores=_count(outcome.fill_cores),
        proof=ProofKind(outcome.proof),
        proof_kinds=tuple(ProofKind(kind) for kind in outcome.proof_kinds),
        columns=() if chosen is None else (_chosen(chosen, vertices),),
    )


def _chosen(chosen: NDArray[np.integer[Any]], vertices: int) -> Column:
    """Write chosen vertices as a column; ValueError unless they are vertices in ascending order, each once."""
    if chosen.ndim != 1 or chosen.size > vertices:
        raise ValueError(f"chosen has shape {chosen.shape} on {vertices} vertices")
    if chosen.size and (int(chosen[0]) < 0 or int(chosen[-1]) >= vertices or bool((chosen[1:] <= chosen[:-1]).any())):
        raise ValueError("chosen is not an ascending list of vertices")
    return Column("chosen", ElementType.UINT32, chosen.astype("<u4", copy=False).tobytes())


def _exact(value: int | Fraction | None) -> tuple[int, int] | None:
    if value is None:
        return None
    exact = Fraction(value)
    return exact.numerator, exact.denominator


def _count(value: int | None) -> int | None:
    return None if value is None or value < 0 else int(value)
