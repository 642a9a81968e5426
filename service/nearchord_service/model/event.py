"""Numbered events: the only way news of a job leaves the store."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from enum import StrEnum

from nearchord_service.model.stage import Stage, Verdict


class Phase(StrEnum):
    """What a solve is doing."""

    READ = "read"
    ORDER = "order"
    FILL = "fill"
    TREE = "tree"
    SWEEP = "sweep"
    IMPROVE = "improve"


@dataclass(frozen=True)
class Progress:
    """How far a solve is; figures not known yet are None. `seconds` is the running time of the attempt."""

    phase: Phase
    fraction_done: float
    seconds: float
    fill: int | None = None
    fill_lower_bound: int | None = None
    bags_done: int | None = None
    bags: int | None = None
    states: int | None = None
    incumbent: int | None = None
    bound: int | None = None


@dataclass(frozen=True)
class Reached:
    """A job reached a stage."""

    stage: Stage
    verdict: Verdict | None
    reason: str


@dataclass(frozen=True)
class Event:
    """One numbered row. Numbers ascend over the whole store in commit order, so one number is a cursor for anything."""

    sequence: int
    job_id: str
    batch_index: int
    time: dt.datetime
    attempt: int
    news: Reached | Progress
