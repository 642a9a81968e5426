"""Live figures as plain values, and the window of recent run times behind their quantiles."""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass

from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import QueueFigures
from nearchord_service.work.port import SlotFigures

RECENT_RUNS = 1_000
RATE_SECONDS = 10.0


@dataclass(frozen=True)
class QuestionLoad:
    """Jobs of one question that ended with one verdict; quantiles in worker seconds over the latest 1,000."""

    question: QuestionName
    verdict: Verdict
    finished: int
    seconds_p50: float
    seconds_p90: float
    seconds_p99: float


@dataclass(frozen=True)
class Load:
    """Figures at one moment. Counts are since the server started."""

    queue: QueueFigures
    slots: SlotFigures
    submitted: int
    finished: int
    finished_per_second: float
    watch_streams: int
    questions: tuple[QuestionLoad, ...]


class RecentRuns:
    """The latest run times of one question and verdict. Not for several threads at once."""

    def __init__(self) -> None:
        self._seconds: deque[float] = deque(maxlen=RECENT_RUNS)

    def add(self, seconds: float) -> None:
        """Take a run time in."""
        self._seconds.append(seconds)

    def quantiles(self, *shares: float) -> tuple[float, ...]:
        """Return for each share the smallest run time that at least this share of runs does not exceed (0: no runs).

        Time O(r log r) for r runs kept.
        """
        ordered = sorted(self._seconds)
        if not ordered:
            return tuple(0.0 for _ in shares)
        last = len(ordered) - 1
        return tuple(ordered[min(last, max(0, math.ceil(share * len(ordered)) - 1))] for share in shares)


class Rate:
    """Events a second over the last ten seconds. Not for several threads at once."""

    def __init__(self, clock: Callable[[], float]) -> None:
        self._clock = clock
        self._counts: deque[tuple[int, int]] = deque()

    def add(self) -> None:
        """Count an event now."""
        tick = int(self._clock() * 10)
        if self._counts and self._counts[-1][0] == tick:
            self._counts[-1] = (tick, self._counts[-1][1] + 1)
        else:
            self._counts.append((tick, 1))
        self._forget()

    def per_second(self) -> float:
        """Return the rate, in steps of a tenth of a second."""
        self._forget()
        return sum(count for _, count in self._counts) / RATE_SECONDS

    def _forget(self) -> None:
        oldest = int((self._clock() - RATE_SECONDS) * 10)
        while self._counts and self._counts[0][0] <= oldest:
            self._counts.popleft()
