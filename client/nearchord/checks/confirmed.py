"""The result of a check."""

from __future__ import annotations

from dataclasses import dataclass

from nearchord.answer import Answer
from nearchord.errors import CheckFailed
from nearchord.stages import Verdict


@dataclass(frozen=True)
class Confirmed:
    """What a check confirmed and what it could not, each in words."""

    what: tuple[str, ...]
    not_confirmed: tuple[str, ...]

    def and_also(self, other: Confirmed) -> Confirmed:
        """Both checks together."""
        return Confirmed(self.what + other.what, self.not_confirmed + other.not_confirmed)


class Findings:
    """Collects words while a check goes on."""

    def __init__(self) -> None:
        self._what: list[str] = []
        self._open: list[str] = []

    def confirm(self, what: str) -> None:
        """Note something confirmed."""
        self._what.append(what)

    def leave_open(self, what: str) -> None:
        """Note something that could be neither confirmed nor refuted."""
        self._open.append(what)

    def settle(self) -> Confirmed:
        """Return both lists."""
        return Confirmed(tuple(self._what), tuple(self._open))


def check_unanswered(answer: Answer) -> Confirmed:
    """An answer without a value: nothing is chosen, and of the answered verdicts only BOUNDED comes without one."""
    if answer.verdict.answered and answer.verdict is not Verdict.BOUNDED:
        raise CheckFailed(f"the verdict is {answer.verdict}, but there is no value")
    if answer.chosen.size:
        raise CheckFailed(f"{answer.chosen.size} vertices are chosen, but there is no value")
    return Confirmed((), (f"anything: the job ended {answer.verdict} without an answer",))


def check_sides(answer: Answer) -> None:
    """Value and bound have to be on the right sides of each other, and to meet when the verdict is PROVEN."""
    value, bound = answer.value, answer.bound
    if value is None or bound is None:
        raise CheckFailed(f"the verdict is {answer.verdict}, but there is no bound")
    if (bound < value) if answer.question.maximises else (bound > value):
        raise CheckFailed(f"the bound {bound} contradicts the value {value}")
    if answer.verdict is Verdict.PROVEN and bound != value:
        raise CheckFailed(f"the verdict is PROVEN, but the bound {bound} is not the value {value}")
