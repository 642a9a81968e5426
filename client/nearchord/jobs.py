"""Jobs and batches as a caller sees them: what is submitted, where it stands, what happens to it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import datetime
from typing import TYPE_CHECKING

from nearchord.budget import Budget
from nearchord.question import Question
from nearchord.stages import Phase, Stage, Verdict, WhenOver

if TYPE_CHECKING:
    from nearchord.graph import Graph


@dataclass(frozen=True)
class Addresses:
    """Where a stored graph, its weights and its names are found; "" for weights or names that it has not."""

    graph: str
    weights: str = ""
    names: str = ""


@dataclass(frozen=True)
class JobRequest:
    """One job of a batch; the fields are those of `Service.submit`."""

    graph: Graph | Addresses
    question: Question
    budget: Budget | None = None
    when_over: WhenOver | str = WhenOver.BOUND
    priority: int = 0
    not_after: datetime | None = None
    label: str = ""

    @property
    def subject(self) -> Graph | Addresses:
        """What is sent of `graph`: without its weights where the question takes none, or brings others instead."""
        if self.question.takes_weights and self.question.vectors is None:
            return self.graph
        if isinstance(self.graph, Addresses):
            return replace(self.graph, weights="")
        return self.graph.with_weights(None)


@dataclass(frozen=True)
class JobInfo:
    """A job as the server holds it. `verdict` is None before DONE; times are UTC, None before they happened."""

    id: str
    batch_id: str
    batch_index: int
    label: str
    graph_address: str
    weights_address: str
    names_address: str
    vertices: int
    edges: int
    question: Question
    budget: Budget
    when_over: WhenOver
    priority: int
    not_after: datetime | None
    stage: Stage
    verdict: Verdict | None
    reason: str
    attempt: int
    cancel_requested: bool
    created_at: datetime | None
    started_at: datetime | None
    finished_at: datetime | None
    sequence: int


@dataclass(frozen=True)
class BatchInfo:
    """A batch with the counts of its jobs by stage."""

    id: str
    label: str
    created_at: datetime | None
    jobs: int
    waiting: int
    solving: int
    done: int


@dataclass(frozen=True)
class Progress:
    """How far a solve is. `fraction_done` is of this phase, 0 to 1; figures not known yet are None."""

    phase: Phase | None
    fraction_done: float
    fill: int | None
    fill_lower_bound: int | None
    bags_done: int | None
    bags: int | None
    states: int | None
    incumbent: int | None
    bound: int | None
    seconds: float


@dataclass(frozen=True)
class Event:
    """One numbered row of a job's life: either a stage was reached (`stage`), or the solve went on (`progress`).

    `sequence` ascends over the whole server: hand the last one seen to `watch(after=...)` to go on from there.
    """

    sequence: int
    job_id: str
    batch_index: int
    time: datetime | None
    attempt: int
    stage: Stage | None = None
    verdict: Verdict | None = None
    reason: str = ""
    progress: Progress | None = None

    @property
    def final(self) -> bool:
        """Whether the job has ended with this event."""
        return self.stage is Stage.DONE
