"""The linear relaxation: least cost x on the non-edges of a core, subject to the cuts found so far."""

import highspy
import numpy as np

from nearchord_solve.arrays import F64, I32, I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Cuts, Multipliers, excess, rounded_up, unnumbered
from nearchord_solve.fill.exact.cycles import Cycles
from nearchord_solve.linear import quiet_solver
from nearchord_solve.monitor import Monitor

FORBIDDING = 1e5
OPEN, ADDED, LEFT_OUT = -1, 1, 0


class Relaxation:
    """A growing linear program over x in [0, 1], solved again from its last basis.

    ``pairs`` int32[c, 2] are the columns: non-edges that occur in a cut, in order of addition; ``weights`` int64[c] is
    what they cost.  ``cuts`` are the rows, ``column`` int64 the columns of their entries.  ``decided`` int64[c]:
    OPEN, ADDED or LEFT_OUT.
    """

    def __init__(self, core: Core, monitor: Monitor) -> None:
        self.core = core
        self.pairs: I32 = np.empty((0, 2), np.int32)
        self.weights: I64 = np.empty(0, np.int64)
        self.decided: I64 = np.empty(0, np.int64)
        self.cuts = Cuts.of(core, Cycles.none())
        self.column: I64 = np.empty(0, np.int64)
        self._keys = self.cuts.cycles.keys()
        self._idle: I64 = np.empty(0, np.int64)
        self._numbers: I64 = np.empty(0, np.int64)  # of the pairs, ascending
        self._columns: I64 = np.empty(0, np.int64)  # of the pairs with these numbers
        self._solver = quiet_solver(monitor)

    def add(self, cycles: Cycles) -> int:
        """Add cuts that are not there yet; returns how many were."""
        keys = cycles.keys()
        fresh = np.flatnonzero(~np.isin(keys, self._keys))
        if not fresh.size:
            return 0
        cuts = Cuts.of(self.core, cycles.take(fresh))
        column = self._columns_of(cuts.pair)
        self._solver.addRows(
            cuts.count,
            cuts.least.astype(np.float64),
            np.full(cuts.count, highspy.kHighsInf),
            column.size,
            cuts.start[:-1].astype(np.int32),
            column.astype(np.int32),
            cuts.coefficient.astype(np.float64),
        )
        self.cuts = self.cuts.joined(cuts)
        self.column = np.concatenate((self.column, column))
        self._keys = np.concatenate((self._keys, keys[fresh]))
        self._idle = np.concatenate((self._idle, np.zeros(fresh.size, np.int64)))
        return cuts.count

    def _columns_of(self, numbers: I64) -> I64:
        """Columns of pairs, made where no cut has used a pair before."""
        met, first = np.unique(numbers, return_index=True)
        fresh = numbers[np.sort(first[~np.isin(met, self._numbers)])]
        if fresh.size:
            old = self.weights.size
            ends = unnumbered(fresh, self.core.n)
            self.pairs = np.concatenate((self.pairs, ends))
            self.weights = np.concatenate((self.weights, self.core.weights(ends)))
            self.decided = np.concatenate((self.decided, np.full(fresh.size, OPEN)))
            columns = np.arange(old, old + fresh.size)
            numbered = np.concatenate((self._numbers, fresh))
            order = np.argsort(numbered)
            self._numbers, self._columns = numbered[order], np.concatenate((self._columns, columns))[order]
            self._solver.addVars(fresh.size, np.zeros(fresh.size), np.ones(fresh.size))
            self._solver.changeColsCost(fresh.size, columns.astype(np.int32), self.weights[old:].astype(np.float64))
        return self._columns[np.searchsorted(self._numbers, numbers)]

    def decide(self, columns: I64, values: I64) -> None:
        """Put the pairs of columns in (ADDED) or out (LEFT_OUT), and undo earlier decisions about others.

        A pair that is out costs so much that it is taken only where the cuts cannot hold otherwise; then the value
        tells.  The program stays feasible, so there are always multipliers.
        """
        wanted = np.full(self.decided.size, OPEN)
        wanted[columns] = values
        for column in np.flatnonzero(wanted != self.decided).tolist():
            value = wanted[column]
            self._solver.changeColBounds(column, 1.0 if value == ADDED else 0.0, 1.0)
            self._solver.changeColCost(column, FORBIDDING if value == LEFT_OUT else float(self.weights[column]))
        self.decided = wanted

    def solve(self) -> float | None:
        """Optimal value, or None if infeasible or not solved."""
        self._solver.run()
        if self._solver.getModelStatus() != highspy.HighsModelStatus.kOptimal:
            return None
        return float(self._solver.getObjectiveValue())

    def values(self) -> F64:
        """x by column."""
        found: F64 = np.array(self._solver.getSolution().col_value)
        return np.clip(found, 0.0, 1.0)

    def point(self) -> F64:
        """x as a symmetric float64[n, n] matrix."""
        x = np.zeros((self.core.n, self.core.n))
        x[self.pairs[:, 0], self.pairs[:, 1]] = x[self.pairs[:, 1], self.pairs[:, 0]] = self.values()
        return x

    def multipliers(self) -> Multipliers:
        """Those of the cuts."""
        return Multipliers.near(np.array(self._solver.getSolution().row_dual), self.cuts)

    def bound(self, multipliers: Multipliers) -> int:
        """Fill edges of the part that any fill needs which agrees with what is decided."""
        load = self.cuts.loads(multipliers.numerators, self.column, self.weights.size)
        over = excess(load, self.weights, multipliers.denominator)
        added = self.decided == ADDED
        total = int(self.cuts.least @ multipliers.numerators) - int(over[self.decided == OPEN].sum())
        total += int((self.weights[added] * multipliers.denominator - load[added]).sum())
        return rounded_up(total, multipliers.denominator)

    def fractional(self, tolerance: float) -> I64:
        """Columns with x neither 0 nor 1 that are not decided, the most doubtful first."""
        values = self.values()
        doubt = np.minimum(values, 1.0 - values)
        found = np.flatnonzero((doubt > tolerance) & (self.decided == OPEN))
        return found[np.lexsort((found, -doubt[found].round(6)))]

    def support(self) -> I32:
        """Pairs with x nearer to 1 than to 0."""
        return self.pairs[self.values() > 0.5]

    def drop_idle(self, patience: int) -> None:
        """Remove cuts whose multiplier has been zero in the last ``patience`` calls."""
        duals = np.array(self._solver.getSolution().row_dual)
        self._idle = np.where(duals > 1e-9, 0, self._idle + 1)
        gone = np.flatnonzero(self._idle > patience)
        if not gone.size:
            return
        self._solver.deleteRows(gone.size, gone.astype(np.int32))
        kept = np.flatnonzero(self._idle <= patience)
        self.column = self.column[np.repeat(self._idle <= patience, np.diff(self.cuts.start))]
        self.cuts, self._keys, self._idle = self.cuts.take(kept), self._keys[kept], self._idle[kept]
