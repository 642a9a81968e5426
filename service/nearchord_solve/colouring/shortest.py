"""The shortest frame of one part, as a linear program over its independent sets.

Minimise the sum of x(S) over independent sets S, subject to: the x(S) with v in S add up to the demand of v.  The dual
maximises the sum of y(v) times demand, subject to: no independent set is worth more than 1.  Sets are brought in as
they are needed: the heaviest one under the present y either is worth more than 1, and comes in, or there is none.

Floating-point numbers only say where to look.  Whatever y >= 0 in whole numbers, if no independent set is worth more
than W then no plan is shorter than (sum of y(v) times demand) / W: that bound is exact, because W comes from a sweep in
whole numbers.  At the end the basis is solved in fractions, the plan and the multipliers are checked in whole numbers,
and only if both say the same length is it called the shortest.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import ceil

import highspy
import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import F64, I64
from nearchord_solve.colouring.heaviest_sets import Heaviest, HeaviestSets
from nearchord_solve.colouring.plan import Plan
from nearchord_solve.colouring.rational import solve_exactly
from nearchord_solve.linear import quiet_solver
from nearchord_solve.monitor import Monitor
from nearchord_solve.proof import Certificate

SCALE = 2**30  # multipliers are rounded down to so many parts of one
MOST_SUM = 2**62
MOST_ROUNDS = 20_000
NEAR = 1e-9
AT_ONCE = 6  # further sets brought in with the heaviest one
PRIMAL = 4  # simplex on plans, which stay feasible when sets come in

Sets = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Bottleneck:
    """Multipliers that no independent set of the part is worth more than ``denominator`` of: int64[p] >= 0."""

    numerator: I64
    denominator: int
    certify: Callable[[], Certificate]

    def bound(self, demand: I64) -> Fraction:
        """No plan is shorter."""
        worth = sum(y * d for y, d in zip(self.numerator.tolist(), demand.tolist(), strict=True))
        return Fraction(worth, max(1, self.denominator))


@dataclass(frozen=True, eq=False)
class Shortest:
    """``plan`` serves all demands; ``bottleneck`` bounds every plan from below; None where nothing was found."""

    plan: Plan | None
    bottleneck: Bottleneck | None


class Master:
    """The linear program over the sets found so far.  Demands are divided by the largest, so that it is well scaled."""

    def __init__(self, demand: I64, monitor: Monitor) -> None:
        self._solver = quiet_solver(monitor)
        self._solver.setOptionValue("simplex_strategy", PRIMAL)
        self._scale = float(max(1, demand.max(initial=0)))
        rows = demand.size
        none = np.empty(0, np.int32)
        self._solver.addRows(
            rows, demand / self._scale, np.full(rows, highspy.kHighsInf), 0, np.zeros(rows, np.int32), none,
            np.empty(0),
        )  # fmt: skip
        self._demand = demand
        self.member: Sets = np.zeros((0, rows), np.bool_)
        self._known: set[bytes] = set()

    def add(self, sets: Sequence[NDArray[np.bool_]] | Sets) -> int:
        """Bring in those of ``sets`` bool[k, p] that are new; returns how many."""
        fresh = []
        for one in sets:
            key = np.packbits(one).tobytes()
            if key not in self._known:
                self._known.add(key)
                fresh.append(one)
        if not fresh:
            return 0
        new = np.array(fresh)
        self.member = np.concatenate((self.member, new))
        sizes = new.sum(axis=1)
        self._solver.addCols(
            len(fresh), np.ones(len(fresh)), np.zeros(len(fresh)), np.full(len(fresh), highspy.kHighsInf),
            int(sizes.sum()), (np.cumsum(sizes) - sizes).astype(np.int32), np.nonzero(new)[1].astype(np.int32),
            np.ones(int(sizes.sum())),
        )  # fmt: skip
        return len(fresh)

    def solve(self) -> float | None:
        """The least length, about; None if not solved."""
        self._solver.run()
        if self._solver.getModelStatus() != highspy.HighsModelStatus.kOptimal:
            return None
        return float(self._solver.getObjectiveValue()) * self._scale

    def multipliers(self) -> F64:
        """What one more unit of each demand would cost, about, >= 0."""
        found: F64 = np.array(self._solver.getSolution().row_dual)
        return np.clip(found, 0.0, None)

    def _basis(self) -> tuple[I64, I64, I64] | None:
        """The present basis: sets S, rows N without slack, and the square matrix A[N, S]."""
        basis = self._solver.getBasis()
        basic = highspy.HighsBasisStatus.kBasic
        sets = np.array([i for i, status in enumerate(basis.col_status) if status == basic], np.int64)
        tight = np.array([i for i, status in enumerate(basis.row_status) if status != basic], np.int64)
        if sets.size != tight.size:
            return None
        return sets, tight, np.ascontiguousarray(self.member[np.ix_(sets, tight)].T.astype(np.int64))

    def exact_plan(self) -> Plan | None:
        """The plan of the present basis, A[N, S] x = demand[N], in fractions; None where it is none."""
        basis = self._basis()
        return None if basis is None else self._plan(basis[0], solve_exactly(basis[2], self._demand[basis[1]]))

    def exact_prices(self) -> tuple[list[int], int] | None:
        """The multipliers of the present basis, y[N] A[N, S] = 1 and zeros elsewhere, over a common denominator."""
        basis = self._basis()
        if basis is None:
            return None
        _, tight, matrix = basis
        return self._prices(tight, solve_exactly(np.ascontiguousarray(matrix.T), np.ones(tight.size, np.int64)))

    def _plan(self, sets: I64, found: tuple[list[int], int] | None) -> Plan | None:
        if found is None or min(found[0], default=0) < 0:
            return None
        lengths, denominator = found
        member = self.member[sets]
        served = member.T.astype(object) @ np.array(lengths, object) if lengths else np.zeros(self._demand.size, object)
        if any(got < need * denominator for got, need in zip(served, self._demand.tolist(), strict=True)):
            return None
        used = [i for i, length in enumerate(lengths) if length]
        return Plan(member[used], [lengths[i] for i in used], denominator)

    def _prices(self, tight: I64, found: tuple[list[int], int] | None) -> tuple[list[int], int] | None:
        if found is None or min(found[0], default=0) < 0:
            return None
        prices = [0] * self._demand.size
        for v, y in zip(tight.tolist(), found[0], strict=True):
            prices[v] = y
        return prices, found[1]

    def rounded(self) -> Plan:
        """The present plan with lengths rounded up to a fine grid, and what is then missing added singly."""
        values = np.clip(np.array(self._solver.getSolution().col_value), 0.0, None)
        used = np.flatnonzero(values > 1e-9)
        unit = SCALE
        lengths = [int(-(-value * self._scale * unit // 1)) for value in values[used].tolist()]
        member = self.member[used]
        served = member.T.astype(object) @ np.array(lengths, object) if lengths else np.zeros(self._demand.size, object)
        short = [max(0, need * unit - got) for got, need in zip(served, self._demand.tolist(), strict=True)]
        lacking = [v for v, missing in enumerate(short) if missing]
        singles = np.eye(self._demand.size, dtype=np.bool_)[lacking]
        return Plan(np.concatenate((member, singles)), [*lengths, *(short[v] for v in lacking)], unit)


def shortest_frame(
    demand: I64, sets: HeaviestSets, first: Sets, target: Fraction, whole: bool, monitor: Monitor
) -> Shortest:
    """The shortest frame for ``demand`` int64[p], unless stopped before.

    ``first`` bool[k, p]: independent sets to begin with, that cover every vertex.  Ends early with a plan no longer
    than ``target``; with ``whole`` also when the bound, rounded up to a whole number, cannot become better.
    """
    master = Master(demand, monitor)
    master.add(first)
    best: Bottleneck | None = None
    plan: Plan | None = None
    for _ in range(MOST_ROUNDS):
        length = master.solve()
        if length is None or monitor.stop:
            return Shortest(plan, best)
        plan = None
        if length <= float(target) * (1 + NEAR):
            plan = master.exact_plan()
            if plan is not None and plan.frame <= target:
                return Shortest(plan, best)
        prices = np.floor(master.multipliers() * SCALE).astype(np.int64)
        heaviest = sets.heaviest(prices)
        if heaviest is None:
            break
        best = _better(best, prices, heaviest, demand)
        if whole and best is not None and ceil(best.bound(demand)) >= ceil(length * (1 - NEAR)):
            break
        if heaviest.weight > SCALE * (1 + NEAR) + demand.size:
            if master.add(sets.cover(heaviest, prices, AT_ONCE)):
                continue
            break
        more, best = _prove(master, demand, sets, best)
        if more is None or not master.add(more[None]):
            break
    return Shortest(plan or master.exact_plan() or master.rounded(), best)


def _prove(
    master: Master, demand: I64, sets: HeaviestSets, best: Bottleneck | None
) -> tuple[NDArray[np.bool_] | None, Bottleneck | None]:
    """Look at the multipliers of the basis in fractions: a set that is worth more than 1 after all, if there is one,
    and the best bound."""
    found = master.exact_prices()
    if found is None or sum(found[0]) >= MOST_SUM:
        return None, best
    prices = np.array(found[0], np.int64)
    heaviest = sets.heaviest(prices)
    if heaviest is None:
        return None, best
    return heaviest.chosen if heaviest.weight > found[1] else None, _better(best, prices, heaviest, demand)


def _better(best: Bottleneck | None, prices: I64, heaviest: Heaviest, demand: I64) -> Bottleneck | None:
    """The better of two bounds."""
    if heaviest.weight == 0:
        return best
    other = Bottleneck(prices, heaviest.weight, heaviest.certify)
    return other if best is None or other.bound(demand) > best.bound(demand) else best
