"""The life of a job as data: its stages, and every transition it can make.

The table `TRANSITIONS` is the only statement of what may follow what. The store refuses any other move, and the
diagram in the contributor guide is generated from it.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Stage(StrEnum):
    """Where a job stands."""

    WAITING = "WAITING"
    SOLVING = "SOLVING"
    DONE = "DONE"


class Verdict(StrEnum):
    """How a job in stage DONE ended."""

    PROVEN = "PROVEN"
    BOUNDED = "BOUNDED"
    OVER_FILL = "OVER_FILL"
    INFEASIBLE = "INFEASIBLE"
    CANCELLED = "CANCELLED"
    EXPIRED = "EXPIRED"
    BROKEN = "BROKEN"


@dataclass(frozen=True)
class Transition:
    """One allowed move.

    `name` names the move; `source` is None for the first one; `fenced` moves are made by the holder of an attempt and
    must present its number.
    """

    name: str
    source: Stage | None
    target: Stage
    verdicts: frozenset[Verdict]
    fenced: bool


_NONE: frozenset[Verdict] = frozenset()
_ANSWERS = frozenset(
    {
        Verdict.PROVEN,
        Verdict.BOUNDED,
        Verdict.OVER_FILL,
        Verdict.INFEASIBLE,
        Verdict.CANCELLED,
        Verdict.BROKEN,
    }
)

ACCEPT = Transition("accept", None, Stage.WAITING, _NONE, fenced=False)
CLAIM = Transition("claim", Stage.WAITING, Stage.SOLVING, _NONE, fenced=False)
FINISH = Transition("finish", Stage.SOLVING, Stage.DONE, _ANSWERS, fenced=True)
GIVE_BACK = Transition("give back", Stage.SOLVING, Stage.WAITING, _NONE, fenced=True)
WITHDRAW = Transition("withdraw", Stage.WAITING, Stage.DONE, frozenset({Verdict.CANCELLED}), fenced=False)
EXPIRE = Transition("expire", Stage.WAITING, Stage.DONE, frozenset({Verdict.EXPIRED}), fenced=False)

TRANSITIONS: tuple[Transition, ...] = (ACCEPT, CLAIM, FINISH, GIVE_BACK, WITHDRAW, EXPIRE)


def transition(source: Stage | None, target: Stage, verdict: Verdict | None) -> Transition:
    """Return the table's row for a move; raises ValueError when the table has none."""
    for row in TRANSITIONS:
        fits = row.source is source and row.target is target
        if fits and (verdict in row.verdicts if row.verdicts else verdict is None):
            return row
    raise ValueError(f"no transition from {source} to {target} with verdict {verdict}")
