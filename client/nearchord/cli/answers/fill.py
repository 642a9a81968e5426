"""Answers to the question `fill`."""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Iterator
from typing import Any

import nearchord
from nearchord.cli import witness
from nearchord.cli.layout import print_table
from nearchord.cli.names import Labels

PAIRS_ON_A_TERMINAL = 20


def record(answer: nearchord.Answer, labels: Labels) -> dict[str, Any]:
    """The keys that only this question has; the witnesses are what `nearchord check` confirms it from."""
    classes = answer.recognition or nearchord.Recognition(None, None, None, None)
    return {
        "fill_edges": [labels.of(pair) for pair in answer.fill_edges.tolist()],
        "chordal": classes.chordal,
        "interval": classes.interval,
        "split": classes.split,
        "splittance": classes.splittance,
        "witness": witness.to_json(answer.columns, labels, answer.vertices),
    }


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """Bounds, classes and proof kinds for people."""
    if answer.value is not None or answer.bound is not None:
        yield "fill", fill_range(answer)
    if answer.recognition is not None:
        yield "classes", _classes(answer.recognition)
    if answer.fill_cores:
        kinds = Counter(str(kind) for kind in answer.proof_kinds)
        how = f", bounded by {', '.join(f'{kind} ({count:,})' for kind, count in kinds.items())}" if kinds else ""
        yield "cores", f"{answer.fill_cores:,}{how}"


def fill_range(answer: nearchord.Answer) -> str:
    """How many pairs suffice and how many are needed."""
    if answer.value is None:
        return f"at least {answer.bound:,}"
    if answer.verdict is nearchord.Verdict.PROVEN:
        return f"{answer.value:,} (no fewer make the graph chordal)"
    return f"{answer.value:,} (at least {answer.bound or 0:,} are needed)"


def _classes(found: nearchord.Recognition) -> str:
    flags = {"chordal": found.chordal, "interval": found.interval, "split": found.split}
    words = [f"{name} not settled" if flag is None else name if flag else f"not {name}" for name, flag in flags.items()]
    if found.splittance:
        words[-1] += f" (splittance {found.splittance:,})"
    return ", ".join(words)


def show_pairs(answer: nearchord.Answer, labels: Labels) -> None:
    """Print the pairs to add; a terminal gets the first and the number left out."""
    pairs = answer.fill_edges
    if not len(pairs):
        return
    shown = pairs[:PAIRS_ON_A_TERMINAL] if sys.stdout.isatty() else pairs
    rows = [tuple(map(str, labels.of(pair))) for pair in shown.tolist()]
    sys.stdout.write("\n")
    print_table(("add edge", "to"), rows, flexible="add edge")
    if len(shown) < len(pairs):
        sys.stdout.write(f"... and {len(pairs) - len(shown):,} more (--json has all)\n")
