"""What the general solvers are given: 0-1 programs in the best formulation found for each question.

Choices are stated over groups of vertices of which at most one may be chosen, best of all the maximal cliques:

- independent set: at most one of each group;
- clique: with all maximal cliques given, one of them is taken, so the program is a choice among cliques;
- q colours: one copy of the groups for each colour, each vertex in one colour at most, and at most q chosen of each
  maximal clique;
- forest: at most two of each maximal clique; longer cycles are cut off as they appear (:mod:`bench.cycles`);
- colouring: as q colours with every vertex coloured and the number of used colours minimised; colours are used in
  order, and those of one largest clique are given.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from bench.cliques import Groups

I64 = NDArray[np.int64]


@dataclass(frozen=True)
class Model:
    """Best ``cost`` @ x over 0-1 vectors x with ``lower`` <= rows @ x <= ``upper``.

    Row i has the coefficients ``value[ptr[i]:ptr[i+1]]`` on the columns ``index[ptr[i]:ptr[i+1]]``; all int64.
    ``cuts``: rows over the first ``cuts`` columns may be added where chosen vertices close a cycle; 0 means none.
    """

    cost: I64
    ptr: I64
    index: I64
    value: I64
    lower: I64
    upper: I64
    maximise: bool = True
    cuts: int = 0

    @property
    def rows(self) -> int:
        """Number of rows."""
        return self.lower.size


def _rows(cost: I64, groups: Groups, most: int, cuts: int = 0) -> Model:
    """At most so many of each group."""
    count = groups.count
    return Model(
        cost, groups.ptr.astype(np.int64), groups.index.astype(np.int64), np.ones(groups.index.size, np.int64),
        np.zeros(count, np.int64), np.full(count, most, np.int64), cuts=cuts,
    )  # fmt: skip


def independent_set(weights: I64, groups: Groups) -> Model:
    """At most one of each group."""
    return _rows(weights, groups, 1)


def forest(weights: I64, groups: Groups) -> Model:
    """At most two of each clique, and cuts for cycles."""
    large = np.flatnonzero(np.diff(groups.ptr) > 2)
    return _rows(weights, _selected(groups, large), 2, cuts=weights.size)


def clique(weights: I64, groups: Groups) -> Model:
    """One of the maximal cliques; vertices without neighbours are not among them."""
    totals = np.add.reduceat(weights[groups.index], groups.ptr[:-1]) if groups.count else np.zeros(0, np.int64)
    every = np.arange(groups.count, dtype=np.int64)
    return Model(
        totals, np.array([0, groups.count]), every, np.ones_like(every), np.zeros(1, np.int64), np.ones(1, np.int64)
    )


def colour_classes(weights: I64, groups: Groups, colours: int) -> Model:
    """Column k n + v: vertex v has colour k."""
    n = weights.size
    parts = [
        *(Groups(groups.ptr, groups.index + k * n) for k in range(colours)),
        _across(np.arange(n), n, colours),
    ]
    wide = _selected(groups, np.flatnonzero(np.diff(groups.ptr) > colours))
    sizes = np.repeat(np.diff(wide.ptr), colours)
    inside = np.repeat(wide.index[:, None], colours, 1) + np.arange(colours) * n
    spread = Groups(np.concatenate(([0], np.cumsum(sizes.reshape(-1, colours).sum(1)))), inside.ravel())
    rows = _joined([*parts, spread])
    upper = np.ones(rows.count, np.int64)
    upper[rows.count - spread.count :] = colours
    return Model(
        np.tile(weights, colours), rows.ptr.astype(np.int64), rows.index.astype(np.int64),
        np.ones(rows.index.size, np.int64), np.zeros(rows.count, np.int64), upper,
    )  # fmt: skip


def colouring(n: int, groups: Groups, colours: int) -> Model:
    """Column k n + v: vertex v has colour k; the last ``colours`` columns say which colours are used."""
    used = colours * n
    ptr, index, value, lower, upper = [0], [], [], [], []

    def add(columns: list[int], coefficients: list[int], low: int, high: int) -> None:
        index.extend(columns)
        value.extend(coefficients)
        ptr.append(len(index))
        lower.append(low)
        upper.append(high)

    for v in range(n):
        add([k * n + v for k in range(colours)], [1] * colours, 1, 1)
    for k in range(colours):
        for begin, end in zip(groups.ptr[:-1].tolist(), groups.ptr[1:].tolist(), strict=True):
            members = [k * n + v for v in groups.index[begin:end].tolist()]
            add([*members, used + k], [1] * len(members) + [-1], -1, 0)
        if k:
            add([used + k - 1, used + k], [1, -1], 0, 1)
    largest = int(np.argmax(np.diff(groups.ptr)))
    for k, v in enumerate(groups.index[groups.ptr[largest] : groups.ptr[largest + 1]].tolist()):
        add([k * n + v], [1], 1, 1)
    cost = np.concatenate((np.zeros(used, np.int64), np.ones(colours, np.int64)))
    return Model(cost, *(np.array(part, np.int64) for part in (ptr, index, value, lower, upper)), maximise=False)


def _selected(groups: Groups, which: NDArray[np.int64]) -> Groups:
    sizes = np.diff(groups.ptr)
    wanted = np.zeros(groups.count, bool)
    wanted[which] = True
    return Groups(np.concatenate(([0], np.cumsum(sizes[wanted]))), groups.index[np.repeat(wanted, sizes)])


def _across(vertices: I64, n: int, colours: int) -> Groups:
    """For each vertex its columns, one a colour."""
    columns = vertices[:, None] + np.arange(colours) * n
    return Groups(np.arange(0, columns.size + 1, colours), columns.ravel())


def _joined(parts: list[Groups]) -> Groups:
    offsets = np.cumsum([0, *(part.index.size for part in parts)])
    ptr = [part.ptr[:-1] + offset for part, offset in zip(parts, offsets[:-1], strict=True)]
    return Groups(np.concatenate([*ptr, offsets[-1:]]), np.concatenate([part.index for part in parts]))
