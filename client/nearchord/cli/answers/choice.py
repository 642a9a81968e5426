"""Answers that choose vertices."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import nearchord
from nearchord.cli.answers import prices, sets
from nearchord.cli.layout import print_listing
from nearchord.cli.numbers import number
from nearchord.cli.subject import Subject


def record(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    """The keys that only choices have: colours, and what was asked for beside the choice."""
    found: dict[str, Any] = {}
    if isinstance(answer.question, nearchord.ColourableSubgraph):
        names = map(str, subject.labels.of(answer.chosen.tolist()))
        colour = dict(zip(names, answer.colour.tolist(), strict=False))
        found = {"colours": answer.question.colours, "colour": colour}
    add_ons = asked_beside(answer.question)
    if add_ons:
        found["add_ons"] = add_ons
    return {**found, **prices.record(answer, subject), **sets.record(answer, subject)}


def asked_beside(question: nearchord.Question) -> dict[str, int | bool]:
    """The add-ons that were asked for, by name; of scenarios how many."""
    asked = {name: getattr(question, name) for name in question.add_ons() if name != "colours"}
    if "scenarios" in asked:
        asked["scenarios"] = question.scenario_count
    return {name: value for name, value in asked.items() if value or (name == "limit" and value is not None)}


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """Its figures for people, as captions and texts; what was not reached is left out."""
    if answer.value is not None:
        side = "at most" if answer.question.maximises else "at least"
        proven = answer.verdict is nearchord.Verdict.PROVEN
        optimum = "nothing better exists" if proven else f"the optimum is {side} {number(answer.bound)}"
        first = ", in the first scenario" if answer.question.scenario_count else ""
        yield "value", f"{number(answer.value)}{first} ({optimum})"
        limit = getattr(answer.question, "limit", None)
        allowed = "" if limit is None else f", {limit:,} at most"
        yield "chosen", f"{len(answer.chosen):,} of {answer.vertices:,} vertices{allowed}"
    if answer.count is not None:
        yield "count", sets.count_in_words(answer.count)
    yield from structure_lines(answer)


def structure_lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """Fill and bags of the triangulation that an answer rests on."""
    if answer.fill is not None:
        least = f" (any triangulation needs {answer.fill_lower_bound:,})" if answer.fill_lower_bound else ""
        yield "fill", f"{answer.fill:,}{least}"
    if answer.bags:
        largest = f", the largest with {answer.largest_bag:,} vertices" if answer.largest_bag is not None else ""
        yield "bags", f"{answer.bags:,}{largest}"


def show(answer: nearchord.Answer, subject: Subject) -> None:
    """Print the vertices chosen, then what was asked for beside them."""
    if answer.value is None:
        return
    if not answer.question.scenario_count:
        _show_names(answer, subject)
    sets.show(answer, subject)
    prices.show(answer, subject)


def _show_names(answer: nearchord.Answer, subject: Subject) -> None:
    if not answer.colour.size:
        print_listing("names", [str(name) for name in subject.labels.of(answer.chosen.tolist())])
        return
    for colour in range(1, int(answer.colour.max()) + 1):
        names = subject.labels.of(answer.chosen[answer.colour == colour].tolist())
        print_listing(f"colour {colour}", [str(name) for name in names])
