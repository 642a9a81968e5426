"""What a question asks for beside its choice: colours, prices, further sets, limits, scenarios."""

from __future__ import annotations

from typing import Any

from nearchord_service.api.convert.violations import Violations
from nearchord_service.model.question import Question, QuestionName

DEFAULT_COLOURS = 2
MOST_COLOURS = 4
MOST_BEST = 1_000
MOST_SCENARIOS = 10_000
MOST_CHOSEN = 10**8
"""Vertices that the sets of one answer may have together: answers are stored in one piece, of less than 10^9 bytes."""

_ALONE = ("limit", "scenarios")
"""What goes with no other add-on."""

_CAPS = {"best": MOST_BEST, "scenarios": MOST_SCENARIOS}


def to_add_ons(asked: Any, name: QuestionName, place: str, wrong: Violations) -> dict[str, Any]:
    """Read the fields of `Question` that only some questions take, from a message at `place`; notes what is wrong."""
    values = {field: _value(asked, field) for field in name.add_ons}
    if values.get("colours", 0) > MOST_COLOURS:
        wrong.add(
            f"{place}.colours",
            f"is {values['colours']}; it must be 1 to {MOST_COLOURS}, or absent for {DEFAULT_COLOURS}",
        )
    for field, cap in _CAPS.items():
        if values.get(field, 0) > cap:
            wrong.add(f"{place}.{field}", f"is {values[field]}, where at most {cap} are allowed; ask for fewer")
    _check_company(values, place, wrong)
    return values


def _value(asked: Any, field: str) -> Any:
    if field == "limit":
        return asked.limit if asked.HasField("limit") else None
    value = getattr(asked, field)
    return value or DEFAULT_COLOURS if field == "colours" else value


def _check_company(values: dict[str, Any], place: str, wrong: Violations) -> None:
    """Note an add-on that stands beside others but goes with none."""
    given = [field for field, value in values.items() if field != "colours" and _asks(field, value)]
    for field in _ALONE:
        others = [other for other in given if other != field]
        if field in given and others:
            wrong.add(
                f"{place}.{field}",
                f"stands beside {', '.join(others)}, but goes with pins only; ask for one of them in another job",
            )
            return


def _asks(field: str, value: Any) -> bool:
    """Say whether a value asks for more than the plain answer."""
    return value is not None if field == "limit" else value > (field == "best")


def check_add_ons(question: Question, vertices: int, place: str, wrong: Violations) -> None:
    """Note where so many sets are asked for that an answer could not hold them."""
    for field in _CAPS:
        sets = getattr(question, field)
        if sets > 1 and sets * vertices > MOST_CHOSEN:
            wrong.add(
                f"{place}.{field}",
                f"is {sets} on {vertices} vertices, where an answer holds sets of {MOST_CHOSEN} vertices together; "
                f"ask for at most {MOST_CHOSEN // vertices}",
            )


def from_add_ons(question: Question, asked: Any) -> None:
    """Write those fields into a message."""
    for field in question.name.add_ons:
        value = getattr(question, field)
        if value is not None:
            setattr(asked, field, value)
