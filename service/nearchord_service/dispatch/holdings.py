"""The leases in hand and where each stands. Changed only under the dispatcher's lock."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

from nearchord_service.model.job import Lease
from nearchord_service.work.port import Task, TaskKey


class Standing(StrEnum):
    """AHEAD (leased, waits for a slot) -> RUNNING -> RECORDING (ended, not in the store yet), or AHEAD -> RECORDING."""

    AHEAD = "ahead"
    RUNNING = "running"
    RECORDING = "recording"


@dataclass
class Held:
    """A lease; `since` is when its standing began. `lost` when the store says that it is not ours any more."""

    lease: Lease
    since: float
    standing: Standing = Standing.AHEAD
    cancelled: bool = False
    lost: bool = False

    @property
    def key(self) -> TaskKey:
        """Job and attempt."""
        return TaskKey(self.lease.job.id, self.lease.attempt)

    @property
    def task(self) -> Task:
        """What an executor is handed."""
        job = self.lease.job
        return Task(
            key=self.key,
            graph=self.lease.graph,
            weights=self.lease.weights,
            vertices=job.vertices,
            edges=job.edges,
            question=job.question,
            budget=job.budget,
            when_over=job.when_over,
            owner=job.owner,
            graph_address=job.graph_address,
        )


class Holdings:
    """All leases in hand, by key; those ahead in the order of the queue."""

    def __init__(self, clock: Callable[[], float]) -> None:
        self._clock = clock
        self._by_key: dict[TaskKey, Held] = {}
        self._ahead: deque[Held] = deque()

    def add(self, lease: Lease) -> Held:
        """Take a fresh lease, ahead of a slot."""
        held = Held(lease, self._clock())
        self._by_key[held.key] = held
        self._ahead.append(held)
        return held

    def get(self, key: TaskKey) -> Held | None:
        """Return a lease in hand."""
        return self._by_key.get(key)

    def of_job(self, job_id: str) -> list[Held]:
        """Return the leases of a job (more than one when an older attempt of ours is not cleared away yet)."""
        return [held for held in self._by_key.values() if held.lease.job.id == job_id]

    def keys(self) -> list[tuple[str, int]]:
        """Return job and attempt of each lease still ours, to renew."""
        return [(key.job_id, key.attempt) for key, held in self._by_key.items() if not held.lost]

    def ahead(self) -> int:
        """Return how many wait for a slot."""
        return len(self._ahead)

    def long_runs(self, before: float) -> int:
        """Count tasks that have been running since `before` or longer."""
        return sum(h.standing is Standing.RUNNING and h.since <= before for h in self._by_key.values())

    def next(self) -> Held:
        """Take the first one ahead for running."""
        held = self._ahead.popleft()
        held.standing, held.since = Standing.RUNNING, self._clock()
        return held

    def oldest_ahead(self) -> float | None:
        """Return since when the first one ahead has waited."""
        return self._ahead[0].since if self._ahead else None

    def take_ahead(self) -> list[Held]:
        """Take all that wait for a slot, to give them back."""
        taken = list(self._ahead)
        self._ahead.clear()
        for held in taken:
            held.standing = Standing.RECORDING
        return taken

    def pull(self, held: Held) -> None:
        """Take one out of those ahead."""
        self._ahead.remove(held)
        held.standing = Standing.RECORDING

    def drop(self, held: Held) -> None:
        """Forget a lease."""
        self._by_key.pop(held.key, None)
