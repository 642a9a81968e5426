"""Answers to the question `structure`."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from dataclasses import asdict
from typing import Any

import nearchord
from nearchord.cli.layout import print_table
from nearchord.cli.numbers import size
from nearchord.wording import counted

TWO_COLOURS = ("colourable-subgraph", 2)


def record(answer: nearchord.Answer) -> dict[str, Any]:
    """The keys that only this question has; `states` is by question here."""
    report = answer.structure
    predictions = () if report is None else report.predictions
    return {
        "states": {_key(one): one.states for one in predictions},
        "components": None if report is None else report.components,
        "largest_core": None if report is None else report.largest_core,
        "predictions": [asdict(one) for one in predictions],
    }


def _key(one: nearchord.Prediction) -> str:
    """A question with its colours; two colours are not said."""
    return one.question if (one.question, one.colours) == TWO_COLOURS else _title(one)


def _title(one: nearchord.Prediction) -> str:
    return f"{one.question} q={one.colours}" if one.colours else one.question


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """How the graph falls apart, for people; what was not reached is left out."""
    if answer.value is not None:
        exactly = answer.verdict is nearchord.Verdict.PROVEN
        yield "fill", f"{answer.value:,}" if exactly else f"{answer.bound or 0:,} to {answer.value:,}"
    if answer.structure is not None:
        parts = "unknown" if answer.parts is None else f"{answer.parts:,}"
        components = answer.structure.components
        yield "parts", f"{parts}, in {counted(components, 'connected component')}"
        if answer.fill_cores:
            yield "cores", f"{answer.fill_cores:,}, the largest with {answer.structure.largest_core:,} vertices"
    if answer.bags:
        largest = f", the largest with {answer.largest_bag:,} vertices" if answer.largest_bag is not None else ""
        yield "bags", f"{answer.bags:,}{largest}"


def show_predictions(answer: nearchord.Answer) -> None:
    """Print what each question would take."""
    if answer.structure is None or not answer.structure.predictions:
        return
    rows = [
        (
            _title(one),
            f"{'>= ' if one.at_least else ''}{one.states:,}",
            size(one.memory_bytes),
            "yes" if one.fits else "no",
        )
        for one in answer.structure.predictions
    ]
    sys.stdout.write("\n")
    print_table(
        ("question", "states", "memory", "fits"), rows, flexible="question", numbers=frozenset({"states", "memory"})
    )
