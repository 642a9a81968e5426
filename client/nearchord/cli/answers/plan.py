"""Answers to `colouring` and `fractional-colouring`: plans for everybody."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from fractions import Fraction
from itertools import chain
from typing import Any

import numpy as np

import nearchord
from nearchord.cli.answers.choice import structure_lines
from nearchord.cli.layout import CAPTION, print_first, print_listing, rows_shown
from nearchord.cli.numbers import number
from nearchord.cli.subject import Subject

SHOWN = 10
"""Bottleneck prices that people get."""


def record(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    """The keys that only plans have, null where there is no plan."""
    names = [str(name) for name in subject.labels.of(range(answer.vertices))]
    if isinstance(answer.question, nearchord.Colouring):
        return {"colour": _colours(answer, names) if answer.value is not None else None, **_bottleneck(answer, names)}
    shares = [{"share": str(share), "chosen": subject.labels.of(of.tolist())} for share, of in answer.shares]
    return {"shares": shares if answer.value is not None else None, **_bottleneck(answer, names)}


def _colours(answer: nearchord.Answer, names: list[str]) -> dict[str, Any]:
    if "colour_start" in answer.columns:
        return {name: list(answer.colours_of(v)) for v, name in enumerate(names)}
    return dict(zip(names, answer.colour.tolist(), strict=True))


def _bottleneck(answer: nearchord.Answer, names: list[str]) -> dict[str, Any]:
    """The prices that are not 0."""
    prices = answer.bottleneck
    found = {name: str(price) for name, price in zip(names, prices, strict=True) if price} if prices else None
    return {"bottleneck": found}


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """The figures for people; what was not reached is left out."""
    plain = isinstance(answer.question, nearchord.Colouring)
    proven = answer.verdict is nearchord.Verdict.PROVEN
    if answer.value is not None and plain:
        left = "no fewer suffice" if proven else f"at least {number(answer.bound)} are needed"
        yield "colours", f"{number(answer.value)} ({left})"
    elif answer.value is not None:
        left = "no shorter frame exists" if proven else f"at least {number(answer.bound)} is needed"
        yield "frame", f"{number(answer.value)}, {len(answer.shares):,} sets take turns ({left})"
    yield from structure_lines(answer)


def show(answer: nearchord.Answer, subject: Subject) -> None:
    """Print the vertices of each colour, or of each part of the frame; then what makes the plan as long as it is."""
    if isinstance(answer.question, nearchord.Colouring):
        _show_colours(answer, subject)
    else:
        _show_shares(answer, subject)
    prices = answer.bottleneck
    dear = sorted((v for v in range(len(prices)) if prices[v]), key=lambda v: (-prices[v], v))
    rows = [(str(name), str(prices[v])) for v in dear[:SHOWN] for name in subject.labels.of([v])]
    if rows:
        print_first(("bottleneck", "price"), rows, len(dear), flexible="bottleneck", numbers=frozenset({"price"}))


def _show_colours(answer: nearchord.Answer, subject: Subject) -> None:
    if not answer.colour.size:
        return
    vertex = np.arange(answer.vertices)
    if "colour_start" in answer.columns:
        vertex = np.repeat(vertex, np.diff(answer.columns["colour_start"]))
    colours = int(answer.colour.max())
    shown, width = rows_shown(colours), max(CAPTION, len(f"colour {colours} "))
    for colour in range(1, shown + 1):
        names = subject.labels.of(vertex[answer.colour == colour].tolist())
        print_listing(f"colour {colour}", [str(name) for name in names], width)
    if shown < colours:
        print_listing("", [f"... and {colours - shown:,} more colours (--json has all)"], width)


def _show_shares(answer: nearchord.Answer, subject: Subject) -> None:
    shares = sorted(answer.shares, key=lambda one: -one[0])
    rows = [
        (str(share), str(of.size), " ".join(map(str, subject.labels.of(of.tolist()))))
        for share, of in shares[: rows_shown(len(shares))]
    ]
    if rows:
        numbers = frozenset({"share", "vertices"})
        print_first(("share", "vertices", "names"), rows, len(shares), flexible="names", numbers=numbers)


def columns(found: Mapping[str, Any], vertex: Callable[[object], int], vertices: int) -> dict[str, Any]:
    """The columns that the keys stand for; KeyError, TypeError or ValueError where they are not of that form."""
    columns: dict[str, Any] = {}
    if found.get("colour") is not None:
        columns.update(_colour_columns({vertex(name): of for name, of in found["colour"].items()}, vertices))
    if found.get("shares") is not None:
        chosen = [sorted(map(vertex, one["chosen"])) for one in found["shares"]]
        columns["share_start"] = np.cumsum([0, *map(len, chosen)]).astype(np.int64)
        columns["share_vertex"] = np.array(list(chain.from_iterable(chosen)), np.uint32)
        columns.update(_fractions("share", [Fraction(one["share"]) for one in found["shares"]]))
    if found.get("bottleneck") is not None:
        prices = [Fraction(0)] * vertices
        for name, price in found["bottleneck"].items():
            prices[vertex(name)] = Fraction(price)
        columns.update(_fractions("bottleneck", prices))
    return columns


def _colour_columns(by_vertex: Mapping[int, Any], vertices: int) -> dict[str, Any]:
    if len(by_vertex) != vertices:
        raise ValueError(f"{len(by_vertex)} of {vertices} vertices have a colour")
    lists = [by_vertex[v] if isinstance(by_vertex[v], list) else [by_vertex[v]] for v in range(vertices)]
    columns = {"colour": np.array(list(chain.from_iterable(lists)), np.uint32)}
    if any(isinstance(of, list) for of in by_vertex.values()):
        columns["colour_start"] = np.cumsum([0, *map(len, lists)]).astype(np.int64)
    return columns


def _fractions(name: str, values: list[Fraction]) -> dict[str, Any]:
    """Numerators over one denominator; OverflowError where they are too long for the columns."""
    below = math.lcm(*(value.denominator for value in values))
    numerators = [value.numerator * (below // value.denominator) for value in values]
    return {f"{name}_numerator": np.array(numerators, np.int64), f"{name}_denominator": np.array([below], np.int64)}
