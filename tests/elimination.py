"""Elimination of a graph along any order, written from the definition, and faults put into such proofs."""

from __future__ import annotations

import random
from collections.abc import Callable, Iterable, Sequence

import numpy as np

Columns = dict[str, np.ndarray]


def fill_of(n: int, edges: Iterable[tuple[int, int]], order: Sequence[int]) -> list[tuple[int, int]]:
    """Pairs that get joined when the vertices go in this order, each leaving its neighbours pairwise joined."""
    near: list[set[int]] = [set() for _ in range(n)]
    for u, v in edges:
        near[u].add(v)
        near[v].add(u)
    fill = []
    gone: set[int] = set()
    for v in order:
        gone.add(v)
        left = sorted(near[v] - gone)
        for a in left:
            for b in left:
                if a < b and b not in near[a]:
                    near[a].add(b)
                    near[b].add(a)
                    fill.append((a, b))
    return sorted(fill)


def columns_of(order: Sequence[int], fill: Iterable[tuple[int, int]]) -> Columns:
    """An order and pairs as an answer brings them."""
    pairs = [v for pair in fill for v in pair]
    return {"proof_order": np.array(order, np.uint32), "proof_fill": np.array(pairs, np.uint32)}


def spoilt(columns: Columns, rng: random.Random, n: int) -> Columns:
    """One fault: a number changed, two swapped, a vertex or a pair dropped or repeated, a pair invented, all turned."""
    name = rng.choice([name for name in columns if columns[name].size])
    fault: Callable[[np.ndarray, random.Random, int], np.ndarray] = rng.choice(
        (_change, _swap, _drop, _repeat, _turn) if name == "proof_order" else (_change, _swap, _drop_pair, _add_pair)
    )
    return {**columns, name: fault(columns[name].copy(), rng, n)}


def _change(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    column[rng.randrange(column.size)] = rng.randrange(n)
    return column


def _swap(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    i, j = rng.randrange(column.size), rng.randrange(column.size)
    column[[i, j]] = column[[j, i]]
    return column


def _drop(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    return np.delete(column, rng.randrange(column.size))


def _repeat(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    return np.insert(column, rng.randrange(column.size), column[rng.randrange(column.size)])


def _turn(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    return column[::-1].copy()


def _drop_pair(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    pairs = column.reshape(-1, 2)
    return np.delete(pairs, rng.randrange(len(pairs)), axis=0).reshape(-1)


def _add_pair(column: np.ndarray, rng: random.Random, n: int) -> np.ndarray:
    return np.concatenate((column, np.array(sorted(rng.sample(range(n), 2)), np.uint32)))
