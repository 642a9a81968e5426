"""Further sets of an answer: the best ones, and those of scenarios."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from decimal import Decimal
from typing import Any

import numpy as np

import nearchord
from nearchord.cli.layout import print_first, rows_shown
from nearchord.cli.numbers import number
from nearchord.cli.subject import Subject

LONGEST_NUMBER = 4_300
"""Digits of the longest number that Python reads from JSON; a count beyond it is written as text."""


def record(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    """The keys of the sets that were asked for, null where the answer has none."""
    found: dict[str, Any] = {}
    if getattr(answer.question, "best", 0) > 1:
        sets = [{"value": value, "chosen": subject.labels.of(chosen.tolist())} for value, chosen in answer.best]
        found["best"] = sets or None
    if getattr(answer.question, "count", False):
        found["count"] = None if answer.count is None else _written(answer.count)
    if answer.question.scenario_count:
        found["scenarios"] = [_scenario(number, one, subject) for number, one in enumerate(answer.scenarios)] or None
    return found


def _written(count: int) -> int | str:
    exact = Decimal(count)  # int() and str() of a number refuse to go on for longer
    return count if exact.adjusted() < LONGEST_NUMBER else str(exact)


def _scenario(number: int, one: nearchord.Scenario, subject: Subject) -> dict[str, Any]:
    names = subject.labels.of(one.chosen.tolist())
    found = {"scenario": subject.title(number), "value": one.value, "bound": one.bound, "chosen": names}
    if one.colour.size:
        found["colour"] = dict(zip(map(str, names), one.colour.tolist(), strict=True))
    return found


def show(answer: nearchord.Answer, subject: Subject) -> None:
    """Print one line a set."""
    figures = frozenset({"set", "value", "at most", "vertices"})
    best, scenarios = answer.best, answer.scenarios
    if best:
        rows = [
            (str(place), f"{value:,}", str(chosen.size), _names(chosen, subject))
            for place, (value, chosen) in enumerate(best[: rows_shown(len(best))], 1)
        ]
        print_first(("set", "value", "vertices", "names"), rows, len(best), flexible="names", numbers=figures)
    if scenarios:
        shown = scenarios[: rows_shown(len(scenarios))]
        lines = [(subject.title(place), *_figures(one), _names(one.chosen, subject)) for place, one in enumerate(shown)]
        headings = ("scenario", "value", "at most", "vertices", "names")
        print_first(headings, lines, len(scenarios), flexible="names", numbers=figures)


def _figures(one: nearchord.Scenario) -> tuple[str, str, str]:
    return f"{one.value:,}", f"{one.bound:,}", str(one.chosen.size)


def _names(chosen: Any, subject: Subject) -> str:
    return " ".join(map(str, subject.labels.of(chosen.tolist())))


def count_in_words(count: int) -> str:
    """How many sets are as heavy as the best."""
    if count == 1:
        return "this is the only set of this value"
    exact = Decimal(count)
    if exact.adjusted() < 30:
        return f"{number(count)} different sets have this value"
    digits = "".join(map(str, exact.as_tuple().digits[:4]))
    return f"about {digits[0]}.{digits[1:]}e{exact.adjusted()} different sets have this value (--json has the number)"


def columns(found: Mapping[str, Any], vertex: Callable[[object], int]) -> dict[str, Any]:
    """The columns that the keys stand for; KeyError, TypeError or ValueError where they are not of that form."""
    columns: dict[str, Any] = {}
    if found.get("best"):
        columns["best_value"] = np.array([one["value"] for one in found["best"]], np.int64)
        columns.update(_joined("best", found["best"], vertex))
    if found.get("scenarios"):
        for name in ("value", "bound"):
            columns[f"scenario_{name}"] = np.array([one[name] for one in found["scenarios"]], np.int64)
        columns.update(_joined("scenario", found["scenarios"], vertex))
        colours = [_by_vertex(one["colour"], vertex) for one in found["scenarios"] if "colour" in one]
        if colours:
            columns["scenario_colour"] = np.array([colour for of in colours for colour in of], np.uint32)
    return columns


def _joined(name: str, sets: list[Mapping[str, Any]], vertex: Callable[[object], int]) -> dict[str, Any]:
    chosen = [sorted(map(vertex, one["chosen"])) for one in sets]
    return {
        f"{name}_start": np.cumsum([0, *map(len, chosen)]).astype(np.int64),
        f"{name}_chosen": np.array([v for of in chosen for v in of], np.uint32),
    }


def _by_vertex(colours: Mapping[str, int], vertex: Callable[[object], int]) -> list[int]:
    numbered = {vertex(name): colour for name, colour in colours.items()}
    return [numbered[v] for v in sorted(numbered)]


def count_from(found: Mapping[str, Any]) -> int | None:
    """The number under the key `count`; ValueError where it is none."""
    count = found.get("count")
    if isinstance(count, str) and count.isascii() and count.isdecimal():
        return int(Decimal(count))
    if count is not None and (not isinstance(count, int) or isinstance(count, bool)):
        raise ValueError(f"the count is {count!r}")
    return count
