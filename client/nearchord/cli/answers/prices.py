"""Prices of vertices and of conflicts: what it costs to overrule the answer."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

import nearchord
from nearchord.cli.layout import print_first
from nearchord.cli.subject import Subject

SHOWN = 10
IMPOSSIBLE = -1


def record(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    """The keys of the prices that were asked for, null where the answer has none; a price of null: impossible."""
    found: dict[str, Any] = {}
    if getattr(answer.question, "prices", False):
        found["price_in"] = _by_name(answer.price_in, answer, subject)
        found["price_out"] = _by_name(answer.price_out, answer, subject)
    if getattr(answer.question, "conflict_prices", False):
        found["conflict_prices"] = _by_conflict(answer, subject) if "conflict_price" in answer.columns else None
    return found


def _by_name(prices: Any, answer: nearchord.Answer, subject: Subject) -> dict[str, int | None] | None:
    if "price_in" not in answer.columns:
        return None
    names = map(str, subject.labels.of(range(len(prices))))
    return dict(zip(names, (None if price < 0 else price for price in prices.tolist()), strict=True))


def _by_conflict(answer: nearchord.Answer, subject: Subject) -> list[list[Any]]:
    prices = answer.conflict_price.tolist()
    return [[*subject.labels.of(pair), price] for pair, price in zip(subject.edges(), prices, strict=False)]


def show(answer: nearchord.Answer, subject: Subject) -> None:
    """Print the dearest: what it costs to have them the other way round, and what dropping conflicts would gain."""
    if answer.price_in.size:
        chosen = np.zeros(answer.vertices, np.bool_)
        chosen[answer.chosen] = True
        other = np.where(chosen, answer.price_out, answer.price_in)
        dearest = np.argsort(-other, kind="stable")
        rows = [
            (name, "leave out" if chosen[v] else "take in", f"{other[v]:,}" if other[v] >= 0 else "impossible")
            for v in dearest[:SHOWN].tolist()
            for name in map(str, subject.labels.of([v]))
        ]
        print_first(("dearest", "to", "costs"), rows, len(other), flexible="dearest", numbers=frozenset({"costs"}))
    if answer.conflict_price.size:
        gains = answer.conflict_price
        best = [edge for edge in np.argsort(-gains, kind="stable")[:SHOWN].tolist() if gains[edge] > 0]
        pairs = dict(zip(best, (subject.edges()[edge] for edge in best), strict=True))
        _show_conflicts(answer, [(*map(str, subject.labels.of(pairs[edge])), f"{gains[edge]:,}") for edge in best])


def _show_conflicts(answer: nearchord.Answer, rows: list[tuple[str, ...]]) -> None:
    left = int((answer.conflict_price > 0).sum())
    headings = ("drop conflict", "with", "gains")
    print_first(headings, rows, left, flexible="drop conflict", numbers=frozenset({"gains"}))


def columns(found: Mapping[str, Any], vertex: Callable[[object], int], graph: nearchord.Graph) -> dict[str, Any]:
    """The columns that the keys stand for; KeyError, TypeError or ValueError where they are not of that form."""
    columns: dict[str, Any] = {}
    for name in ("price_in", "price_out"):
        if found.get(name) is not None:
            columns[name] = np.full(graph.n, IMPOSSIBLE, np.int64)
            for label, price in found[name].items():
                columns[name][vertex(label)] = IMPOSSIBLE if price is None else price
    if found.get("conflict_prices") is not None:
        columns["conflict_price"] = _conflicts(found["conflict_prices"], vertex, graph)
    return columns


def _conflicts(
    listed: list[tuple[object, object, int]], vertex: Callable[[object], int], graph: nearchord.Graph
) -> Any:
    u, v = graph.edges()
    place = {pair: edge for edge, pair in enumerate(zip(u.tolist(), v.tolist(), strict=True))}
    column = np.full(graph.m, IMPOSSIBLE, np.int64)
    for one, other, price in listed:
        ends = sorted((vertex(one), vertex(other)))
        if (ends[0], ends[1]) not in place:
            raise ValueError(f"{one!r} and {other!r} are in no conflict")
        column[place[ends[0], ends[1]]] = price
    return column
