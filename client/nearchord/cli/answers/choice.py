"""Answers that choose vertices."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import nearchord
from nearchord.cli.layout import print_listing
from nearchord.cli.names import Labels
from nearchord.cli.numbers import number


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """Its figures for people, as captions and texts; what was not reached is left out."""
    if answer.value is not None:
        side = "at most" if answer.question.maximises else "at least"
        proven = answer.verdict is nearchord.Verdict.PROVEN
        optimum = "nothing better exists" if proven else f"the optimum is {side} {number(answer.bound)}"
        yield "value", f"{number(answer.value)} ({optimum})"
        yield "chosen", f"{len(answer.chosen):,} of {answer.vertices:,} vertices"
    if answer.fill is not None:
        least = f" (any triangulation needs {answer.fill_lower_bound:,})" if answer.fill_lower_bound else ""
        yield "fill", f"{answer.fill:,}{least}"
    if answer.bags:
        largest = f", the largest with {answer.largest_bag:,} vertices" if answer.largest_bag is not None else ""
        yield "bags", f"{answer.bags:,}{largest}"


def colour_record(answer: nearchord.Answer, question: nearchord.ColourableSubgraph, labels: Labels) -> dict[str, Any]:
    """The keys that only colours have."""
    names = map(str, labels.of(answer.chosen.tolist()))
    return {"colours": question.colours, "colour": dict(zip(names, answer.colour.tolist(), strict=False))}


def show_names(answer: nearchord.Answer, labels: Labels) -> None:
    """Print the vertices chosen."""
    if answer.value is None:
        return
    if not answer.colour.size:
        print_listing("names", [str(name) for name in labels.of(answer.chosen.tolist())])
        return
    for colour in range(1, int(answer.colour.max()) + 1):
        print_listing(
            f"colour {colour}", [str(name) for name in labels.of(answer.chosen[answer.colour == colour].tolist())]
        )
