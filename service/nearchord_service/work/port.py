"""The executor's interface: how a job's work is handed to a killable place and what comes back.

One task runs at a time in a place. Nothing that a task does, not even its death, reaches another task.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Protocol

from nearchord_service.model.answer import Answer
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Progress
from nearchord_service.model.question import Budget, Question, WhenOver


@dataclass(frozen=True)
class TaskKey:
    """Which attempt of which job."""

    job_id: str
    attempt: int


@dataclass(frozen=True)
class Task:
    """Everything a solve needs. `graph` and `weights` are canonical bytes; `weights` None means all ones. Weights are
    demands where the question takes demands, and one vector after the other where it has scenarios.

    `owner` and `graph_address` say whose graph it is; without an address nothing is kept about it for later tasks.
    """

    key: TaskKey
    graph: Bytes
    weights: Bytes | None
    vertices: int
    edges: int
    question: Question
    budget: Budget
    when_over: WhenOver
    owner: str = ""
    graph_address: str = ""


class LossCause(StrEnum):
    """Why a worker ended without an answer (a label of the worker-kill metric)."""

    DIED = "died"
    SECONDS = "seconds"
    MEMORY = "memory"
    CANCEL = "cancel"
    SHUTDOWN = "shutdown"


@dataclass(frozen=True)
class Solved:
    """The task came to an answer (also BOUNDED at its deadline, CANCELLED, or BROKEN for a defect in the solve)."""

    answer: Answer


@dataclass(frozen=True)
class Lost:
    """The worker ended without an answer. `reason` is for people and never empty; `progress` is its last report."""

    cause: LossCause
    reason: str
    progress: Progress | None


class TaskListener(Protocol):
    """Told by the executor, from any of its threads; must return quickly."""

    def progressed(self, key: TaskKey, progress: Progress) -> None:
        """The task went on; at most a few times a second for each task."""

    def ended(self, key: TaskKey, end: Solved | Lost) -> None:
        """The task ended, exactly once for each task."""

    def slots_changed(self) -> None:
        """More tasks may be handed over now."""


@dataclass(frozen=True)
class SlotFigures:
    """Slots by state, and how far warming is (1.0 when nothing warms)."""

    warming: int
    idle: int
    busy: int
    warm_fraction: float


class Executor(Protocol):
    """A set of slots."""

    def start(self, listener: TaskListener) -> None:
        """Begin to make slots ready, in the background."""

    def stop(self, grace_seconds: float) -> None:
        """Stop: running tasks get the grace to end, then are killed (cause SHUTDOWN). Safe to repeat."""

    def free(self) -> int:
        """How many tasks may be handed over now."""

    def run(self, task: Task) -> None:
        """Hand a task over; returns at once."""

    def cancel(self, key: TaskKey) -> None:
        """Ask a task to end as CANCELLED, and kill it if it does not listen. No effect on ended tasks."""

    def figures(self) -> SlotFigures:
        """Return the state of the slots."""
