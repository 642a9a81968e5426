"""The last step of every reader: endpoints, weights and names become a graph, and what was dropped becomes notices."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord import canonical, rows
from nearchord.errors import BadInput
from nearchord.files.document import Document
from nearchord.graph import Graph


@dataclass(frozen=True)
class Edges:
    """Distinct edges as ascending keys, with the numbers of self-loops and repetitions that were dropped."""

    keys: NDArray[np.uint64]
    loops: int
    repeats: int


def distinct_edges(u: canonical.Ints, v: canonical.Ints) -> Edges:
    """Edges of endpoints that are in range already."""
    loop = u == v
    loops = int(loop.sum())
    if loops:
        u, v = u[~loop], v[~loop]
    keys = np.minimum(u, v).view(np.uint64) << np.uint64(32)
    keys |= np.maximum(u, v).view(np.uint64)
    if rows.ascends(keys):
        return Edges(keys, loops, 0)
    keys = np.sort(keys)
    first = np.ones(len(keys), np.bool_)
    np.not_equal(keys[1:], keys[:-1], out=first[1:])
    repeats = len(keys) - int(first.sum())
    return Edges(keys[first] if repeats else keys, loops, repeats)


def build(
    document: Document,
    n: int,
    edges: Edges,
    weights: Sequence[int] | NDArray[Any] | None,
    names: Sequence[str] | None,
    notices: Sequence[str] = (),
) -> Graph:
    """The graph of a file; `notices` come before those about dropped edges."""
    row_ptr, targets = rows.rows_of_keys(n, edges.keys)
    dropped = [_count(edges.loops, "self-loop"), _count(edges.repeats, "repeated edge")]
    said = tuple(f"{document.name}: {notice}" for notice in (*notices, *dropped) if notice)
    graph = Graph(n, len(targets), row_ptr, targets, notices=said)
    try:
        return graph.with_weights(weights).with_names(names)
    except BadInput as wrong:
        raise document.problem(None, wrong.problem, wrong.remedy) from None


def _count(number: int, what: str) -> str:
    return f"{number} {what}{'' if number == 1 else 's'} dropped" if number else ""


def columns(ends: Sequence[int]) -> tuple[canonical.Ints, canonical.Ints]:
    """Both columns of endpoints that were collected alternately."""
    flat = np.array(ends, np.int64)
    return flat[0::2].copy(), flat[1::2].copy()


def spread(given: dict[int, int], n: int, default: int) -> NDArray[np.int64] | None:
    """Weights of all vertices where some were given: the others weigh `default`; None where none was given."""
    if not given:
        return None
    weights = np.full(n, default, np.int64)
    weights[np.fromiter(given, np.int64, len(given))] = np.fromiter(given.values(), np.int64, len(given))
    return weights
