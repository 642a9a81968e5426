"""What add-ons add to the answer about the heaviest independent set."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from nearchord_solve.arrays import I64, U32
from nearchord_solve.monitor import Stop
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.questions.pins import Rest
from nearchord_solve.sweep import Swept


@dataclass(frozen=True, eq=False)
class Settled:
    """What an add-on starts from: the sweep has proven the optimum of ``task``, which is about ``rest``."""

    task: Task
    rest: Rest
    swept: Swept


@dataclass(frozen=True, eq=False)
class Added:
    """Columns for the answer, how many sets are best, and what there is to say (nothing: "")."""

    columns: Mapping[str, U32 | I64] = field(default_factory=dict)
    count: int | None = None
    note: str = ""


AddOn = Callable[[Settled], Added]
WORDS = {"prices": "prices", "conflict_prices": "conflict prices", "best": "the best sets", "count": "the count"}
"""What reasons call the add-ons."""


def extend(outcome: Outcome, task: Task, rest: Rest, swept: Swept | None, wanted: Mapping[str, AddOn]) -> Outcome:
    """The outcome with what the ``wanted`` add-ons add; where no sweep has proven the optimum it says so instead."""
    if not wanted or outcome.verdict not in (Verdict.PROVEN, Verdict.BOUNDED):
        return outcome
    if swept is None:
        names = " and ".join(WORDS[name] for name in wanted)
        return replace(outcome, reason=f"{outcome.reason}; without {names}: that takes an optimum proven by tables")
    for name, add in wanted.items():
        added = add(Settled(task, rest, swept))
        if task.stop is Stop.CANCEL:
            return cancelled(outcome)
        outcome = replace(
            outcome,
            columns={**outcome.columns, **added.columns},
            count=outcome.count if added.count is None else added.count,
            reason=outcome.reason + (f"; {WORDS[name]}: {added.note}" if added.note else ""),
        )
    return outcome


def cancelled(outcome: Outcome) -> Outcome:
    """The same solve, but cancelled after all."""
    nothing = outcome.chosen[:0] if outcome.chosen is not None else None
    return replace(
        outcome, verdict=Verdict.CANCELLED, value=None, bound=None, chosen=nothing, proof="none",
        proof_kinds=("none",) * len(outcome.proof_kinds), reason="cancelled on request", columns={}, count=None,
    )  # fmt: skip
