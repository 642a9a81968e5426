"""What a server is and is doing."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

from nearchord.budget import Budget
from nearchord.stages import Verdict


@dataclass(frozen=True)
class ServerInfo:
    """Version, questions and caps of a server; sizes in bytes."""

    version: str
    solver_version: str
    questions: tuple[str, ...]
    default_budget: Budget
    largest_budget: Budget
    inline_bytes: int
    piece_bytes: int
    content_bytes: int
    batch_jobs: int
    unfinished_jobs: int


@dataclass(frozen=True)
class Slots:
    """Worker slots by state; `warm_fraction` is the share of the warm-up that is done, 1 when nothing warms."""

    warming: int
    idle: int
    busy: int
    warm_fraction: float


@dataclass(frozen=True)
class QuestionLoad:
    """Run times (worker seconds, quantiles of the latest 1,000) of one question that ended one way."""

    question: str
    verdict: Verdict | None
    finished: int
    seconds_p50: float
    seconds_p90: float
    seconds_p99: float


@dataclass(frozen=True)
class Load:
    """Live figures of a server, taken at `time` (UTC)."""

    time: datetime | None
    waiting: int
    solving: int
    oldest_waiting_seconds: float
    slots: Slots
    submitted: int
    finished: int
    finished_per_second: float
    watch_streams: int
    questions: tuple[QuestionLoad, ...]
