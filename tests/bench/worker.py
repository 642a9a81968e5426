"""Times the project's own solver the way a worker process runs it: warmed up, one job at a time, no service."""

from dataclasses import dataclass, replace
from pathlib import Path
from threading import Timer
from time import perf_counter
from typing import Any

import nearchord_solve as ns
import numpy as np

from bench.clock import Spent, Watch
from bench.problem import Problem


@dataclass(frozen=True)
class Timing:
    """One solve: time spent in all, from canonical arrays to the outcome, and seconds by phase."""

    spent: Spent
    phases: dict[str, float]
    outcome: Any

    @property
    def seconds(self) -> float:
        """Seconds by the wall."""
        return self.spent.seconds


class Phases:
    """Seconds spent in each phase, told by the solver's monitor."""

    def __init__(self) -> None:
        self.seconds: dict[str, float] = {}
        self._name = ns.Phase.READ.name.lower()
        self._since = perf_counter()

    def enter(self, phase: ns.Phase) -> None:
        """End the phase before and begin this one."""
        now = perf_counter()
        self.seconds[self._name] = self.seconds.get(self._name, 0.0) + now - self._since
        self._name, self._since = phase.name.lower(), now


def warm_up() -> float:
    """Load or compile every kernel; returns the seconds it took."""
    begun = perf_counter()
    ns.warm_up(lambda *_: None)
    return perf_counter() - begun


def solve(problem: Problem, budget: ns.Budget, seconds: float, question: Any = None, weights: Any = None) -> Timing:
    """Answer a question (None: the heaviest independent set) about a graph not known before; stops at ``seconds``.

    ``weights``: None for those of the problem.
    """
    row_ptr, targets = problem.canonical()
    cells = np.zeros(ns.Monitor.CELLS, np.int64)
    timer = Timer(seconds, cells.__setitem__, (ns.Monitor.STOP, int(ns.Stop.SECONDS)))
    timer.daemon = True
    timer.start()
    phases = Phases()
    watch = Watch()
    graph = ns.Graph.from_canonical(problem.n, row_ptr, targets)
    monitor = ns.Monitor(cells, phases.enter)
    used = problem.weights if weights is None else weights
    outcome = ns.solve(question or ns.IndependentSet(), graph, used, budget, "bound", monitor)
    spent = watch.read()
    timer.cancel()
    return Timing(spent, phases.seconds, replace(outcome, kept=None))


def solve_stored(folder: Path, repeats: int, memory: int, seconds: float) -> list[Timing]:
    """Solve a stored problem so many times, each time anew; made to be called in a fresh process."""
    problem = Problem.load(folder)
    warm_up()
    return [solve(problem, ns.Budget(memory=memory), seconds) for _ in range(repeats)]


def median(timings: list[Timing]) -> Timing:
    """The timing in the middle."""
    return sorted(timings, key=lambda timing: timing.seconds)[len(timings) // 2]
