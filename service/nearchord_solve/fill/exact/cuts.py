"""Cuts as the rows of a linear program, and exact bounds from multipliers of them.

Multipliers are floating-point numbers; they are rounded to fractions with one denominator, and the bound is worked out
again in integers (module :mod:`result` proves it for any multipliers).  So no bound rests on a tolerance.
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import F64, I32, I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cycles import Cycles
from nearchord_solve.fill.exact.kernels.chordless import presence
from nearchord_solve.fill.exact.kernels.cuts import write_cuts
from nearchord_solve.fill.exact.ragged import chained, picked

FINEST = 2**30
ROOM = 2.0**61  # no sum of loads may come near 2^63


@dataclass(frozen=True, eq=False)
class Cuts:
    """Cut i says: the sum of coefficient * x over its entries is at least ``least[i]``.

    ``cycles`` are those behind the cuts; entries ``start[i]`` to ``start[i+1] - 1``, a pair a < b with the number
    a * n + b in ``pair``, and ``coefficient``.  All int64.
    """

    cycles: Cycles
    start: I64
    pair: I64
    coefficient: I64
    least: I64

    @classmethod
    def of(cls, core: Core, cycles: Cycles) -> "Cuts":
        """The cuts of cycles, in their order."""
        return cls(cycles, *write_cuts(core.rows, cycles.ptr, cycles.vertex))

    @property
    def count(self) -> int:
        """Number of cuts."""
        return self.least.size

    def take(self, which: I64) -> "Cuts":
        """Some of them."""
        start, at = picked(self.start, which)
        return Cuts(self.cycles.take(which), start, self.pair[at], self.coefficient[at], self.least[which])

    def joined(self, others: "Cuts") -> "Cuts":
        """These and then the others."""
        return Cuts(
            self.cycles.joined(others.cycles),
            chained(self.start, others.start),
            np.concatenate((self.pair, others.pair)),
            np.concatenate((self.coefficient, others.coefficient)),
            np.concatenate((self.least, others.least)),
        )

    def loads(self, numerators: I64, column: I64, columns: int) -> I64:
        """Sum of coefficient * numerator in each column; entry e counts in ``column[e]``."""
        load = np.zeros(columns, np.int64)
        np.add.at(load, column, self.coefficient * np.repeat(numerators, np.diff(self.start)))
        return load


@dataclass(frozen=True, eq=False)
class Multipliers:
    """``numerators`` int64[k] over ``denominator``."""

    numerators: I64
    denominator: int

    @classmethod
    def near(cls, values: F64, cuts: Cuts) -> "Multipliers":
        """The values cut off to fractions: of :data:`FINEST` parts, or coarser ones where loads would be too large."""
        values = np.maximum(values, 0.0)
        sizes = np.add.reduceat(np.abs(cuts.coefficient), cuts.start[:-1]) if cuts.count else cuts.least
        denominator = FINEST
        while denominator > 1 and float(values @ (sizes + np.abs(cuts.least))) * denominator > ROOM:
            denominator //= 2
        return cls((values * denominator).astype(np.int64), denominator)


def excess(load: I64, weight: I64, denominator: int) -> I64:
    """By how much loads, over the denominator, are above the weights of their pairs."""
    over: I64 = np.maximum(load - weight * denominator, 0)
    return over


def rounded_up(total: int, denominator: int) -> int:
    """The least integer that is not below a fraction."""
    return -(-total // denominator)


def price_matrix(core: Core, cuts: Cuts, multipliers: Multipliers) -> tuple[int, I64]:
    """``base`` and prices int64[n, n] >= 0: a fill costs at least ``base`` plus the prices of its pairs.

    Both over the denominator.
    The weight of a fill is its load plus weight - load over its pairs; the load of all of it is at least the constant
    term.  Prices of edges are 0.
    """
    pairs, column = np.unique(cuts.pair, return_inverse=True)
    load = cuts.loads(multipliers.numerators, column, pairs.size)
    ends = unnumbered(pairs, core.n)
    over = excess(load, core.weights(ends), multipliers.denominator)
    base = int(cuts.least @ multipliers.numerators) - int(over.sum())
    price = np.outer(core.sizes, core.sizes) * multipliers.denominator
    price[presence(core.rows, np.empty((0, 0))) > 0] = 0
    np.fill_diagonal(price, 0)
    price[ends[:, 0], ends[:, 1]] -= load - over
    price[ends[:, 1], ends[:, 0]] = price[ends[:, 0], ends[:, 1]]
    return base, price


def unnumbered(pairs: I64, n: int) -> I32:
    """Pairs int32[k, 2] by their numbers."""
    return np.stack((pairs // n, pairs % n), 1).astype(np.int32)
