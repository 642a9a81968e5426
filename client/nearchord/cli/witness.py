"""Witnesses of a fill as JSON has them, and back to the columns from which the checker confirms them.

Lists of vertices stay lists of names; cliques in a consecutive order become one pair of positions a vertex, the first
and the last clique that has it, because cliques overlap and their lists would repeat most names many times.
A ring of a packing is a list of its groups; a branch tree is the list of its nodes, each with a pair or a packing.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from fractions import Fraction
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.cli.names import Labels

Column = NDArray[Any]
Columns = Mapping[str, Column]
LISTS = ("elimination_order", "chordless_cycle", "split_clique")


def to_json(columns: Columns, labels: Labels, vertices: int) -> dict[str, Any]:
    """The object under the key `witness`; what the answer does not have is null, or an empty list."""
    found: dict[str, Any] = {
        name: labels.of(columns[name].tolist()) if name in columns and columns[name].size else None for name in LISTS
    }
    found["intervals"] = _intervals(columns, vertices)
    found["packing"] = _packing(columns, "packing", labels)
    found["branches"] = list(_trees(columns, labels))
    found["cores"] = [labels.of(core) for core in _cut(columns, "core")]
    return found


def _numbers(columns: Columns, name: str) -> list[int]:
    return [int(number) for number in columns.get(name, np.zeros(0, np.int64)).tolist()]


def _cut(columns: Columns, name: str) -> list[list[int]]:
    start, vertex = _numbers(columns, f"{name}_start"), _numbers(columns, f"{name}_vertex")
    return [vertex[a:b] for a, b in pairwise(start)]


def _packing(columns: Columns, prefix: str, labels: Labels) -> list[dict[str, Any]]:
    vertex, group, ring, numerator, denominator = (
        _numbers(columns, f"{prefix}_{name}") for name in ("vertex", "group", "ring", "numerator", "denominator")
    )
    groups = [labels.of(vertex[a:b]) for a, b in pairwise(group)]
    shares = [_share(Fraction(*share)) for share in zip(numerator, denominator, strict=True)]
    return [{"ring": groups[a:b], "share": share} for (a, b), share in zip(pairwise(ring), shares, strict=True)]


def _trees(columns: Columns, labels: Labels) -> Iterator[list[dict[str, Any]]]:
    """Trees with their nodes in the order of the columns: `pair` is decided, `packing` stands in a leaf."""
    rings = _packing(columns, "branch", labels)
    pair = _numbers(columns, "branch_pair")
    packings = (rings[a:b] for a, b in pairwise(_numbers(columns, "branch_leaf")))
    for begin, end in pairwise(_numbers(columns, "branch_tree")):
        pairs = [pair[2 * node : 2 * node + 2] for node in range(begin, end)]
        yield [{"packing": next(packings)} if u == v else {"pair": labels.of([u, v])} for u, v in pairs]


def _share(share: Fraction) -> int | str:
    return share.numerator if share.denominator == 1 else str(share)


def _intervals(columns: Columns, vertices: int) -> list[list[int]] | None:
    if "clique_start" not in columns or "clique_vertex" not in columns:
        return None
    start, vertex = columns["clique_start"], columns["clique_vertex"]
    clique = np.repeat(np.arange(start.size - 1), np.diff(start))
    first, last = np.full(vertices, start.size, np.int64), np.full(vertices, -1, np.int64)
    np.minimum.at(first, vertex, clique)
    np.maximum.at(last, vertex, clique)
    return [list(pair) for pair in zip(first.tolist(), last.tolist(), strict=True)]


def from_json(found: Mapping[str, Any], vertex: Callable[[object], int], vertices: int) -> dict[str, Column]:
    """The columns of a `witness`; `vertex` gives the number of a name.

    Raises ValueError, TypeError, KeyError or ArithmeticError where the object is not of the form above.
    """
    columns: dict[str, Column] = {}
    for name in LISTS:
        if found.get(name) is not None:
            columns[name] = np.array([vertex(label) for label in found[name]], np.uint32)
    if found.get("intervals") is not None:
        columns.update(_cliques(np.array(found["intervals"], np.int64).reshape(-1, 2), vertices))
    columns.update(_rings("packing", found.get("packing") or [], vertex))
    columns.update(_cases(found.get("branches") or [], vertex))
    columns.update(_joined("core", [[vertex(label) for label in core] for core in found.get("cores") or []]))
    return columns


def _rings(prefix: str, packing: list[Any], vertex: Callable[[object], int]) -> dict[str, Column]:
    shares = [Fraction(one["share"]) for one in packing]
    rings = [[[vertex(label) for label in group] for group in one["ring"]] for one in packing]
    groups = [group for ring in rings for group in ring]
    return {
        f"{prefix}_ring": np.cumsum([0, *map(len, rings)]).astype(np.int64),
        f"{prefix}_group": np.cumsum([0, *map(len, groups)]).astype(np.int64),
        f"{prefix}_vertex": np.array([v for group in groups for v in group], np.uint32),
        f"{prefix}_numerator": np.array([share.numerator for share in shares], np.int64),
        f"{prefix}_denominator": np.array([share.denominator for share in shares], np.int64),
    }


def _cases(trees: list[list[Mapping[str, Any]]], vertex: Callable[[object], int]) -> dict[str, Column]:
    nodes = [node for tree in trees for node in tree]
    leaves = [node["packing"] for node in nodes if "packing" in node]
    pairs = [(0, 0) if "packing" in node else tuple(map(vertex, node["pair"])) for node in nodes]
    return {
        "branch_tree": np.cumsum([0, *map(len, trees)]).astype(np.int64),
        "branch_pair": np.array(pairs, np.uint32).ravel(),
        "branch_leaf": np.cumsum([0, *map(len, leaves)]).astype(np.int64),
        **_rings("branch", [one for leaf in leaves for one in leaf], vertex),
    }


def _joined(name: str, lists: list[list[int]]) -> dict[str, Column]:
    start = np.cumsum([0, *map(len, lists)])
    joined = np.array([vertex for one in lists for vertex in one], np.uint32)
    return {f"{name}_start": start.astype(np.int64), f"{name}_vertex": joined}


def _cliques(spans: Column, vertices: int) -> dict[str, Column]:
    """The cliques that intervals stand for: at each position the vertices whose interval has it."""
    first, last = spans[:, 0], spans[:, 1]
    if len(spans) != vertices or bool((first < 0).any() or (last < first).any() or (last >= max(1, vertices)).any()):
        raise ValueError("intervals are not one pair of positions a vertex, the first not above the last")
    sizes = last - first + 1
    vertex = np.repeat(np.arange(vertices), sizes)
    clique = np.arange(int(sizes.sum())) - np.repeat(np.cumsum(sizes) - sizes - first, sizes)
    counts = np.bincount(clique, minlength=int(last.max(initial=-1)) + 1)
    return {
        "clique_start": np.concatenate(([0], np.cumsum(counts))).astype(np.int64),
        "clique_vertex": vertex[np.lexsort((vertex, clique))].astype(np.uint32),
    }
