"""The linear relaxation: least cost x on the non-edges of a core, subject to the cuts found so far."""

from collections.abc import Mapping

import highspy
import numpy as np

from nearchord_solve.arrays import F64
from nearchord_solve.fill.exact.core import Core, Pair
from nearchord_solve.fill.exact.cycles import Cycle
from nearchord_solve.fill.exact.packing import sides_and_chords
from nearchord_solve.linear import quiet_solver
from nearchord_solve.monitor import Monitor

FORBIDDING = 1e5


class Relaxation:
    """A growing linear program over x in [0, 1], solved again from its last basis.

    ``pairs`` are the columns: non-edges that occur in a cut; ``cycles`` are the rows.  Both in order of addition.
    """

    def __init__(self, core: Core, monitor: Monitor) -> None:
        self.core = core
        self.pairs: list[Pair] = []
        self.column: dict[Pair, int] = {}
        self.cycles: list[Cycle] = []
        self.known: set[Cycle] = set()
        self.idle: list[int] = []
        self._decided: dict[Pair, int] = {}
        self._solver = quiet_solver(monitor)

    def add(self, cycles: list[Cycle]) -> int:
        """Add cuts that are not there yet; returns how many were."""
        fresh = [c for c in cycles if c not in self.known]
        rows = [self._row(cycle) for cycle in fresh]
        self._create_columns()
        self.known.update(fresh)
        self.cycles += fresh
        self.idle += [0] * len(fresh)
        if fresh:
            sizes = [len(columns) for columns, _, _ in rows]
            self._solver.addRows(
                len(fresh),
                np.array([side for _, _, side in rows]),
                np.full(len(fresh), highspy.kHighsInf),
                sum(sizes),
                np.cumsum([0, *sizes[:-1]]).astype(np.int32),
                np.array([i for columns, _, _ in rows for i in columns], np.int32),
                np.array([a for _, coefficients, _ in rows for a in coefficients]),
            )
        return len(fresh)

    def _row(self, cycle: Cycle) -> tuple[list[int], list[float], float]:
        """Columns, coefficients and right side of a cut."""
        sides, chords = sides_and_chords(cycle)
        need = float(len(cycle) - 3)
        open_sides = [pair for pair in sides if not self.core.adj[pair[0]] >> pair[1] & 1]
        columns = [self._column(pair) for pair in (*chords, *open_sides)]
        return columns, [1.0] * len(chords) + [-need] * len(open_sides), need * (1 - len(open_sides))

    def _column(self, pair: Pair) -> int:
        found = self.column.setdefault(pair, len(self.pairs))
        if found == len(self.pairs):
            self.pairs.append(pair)
        return found

    def _create_columns(self) -> None:
        """Columns of pairs that no cut has used before."""
        old = self._solver.getNumCol()
        count = len(self.pairs) - old
        if count:
            self._solver.addVars(count, np.zeros(count), np.ones(count))
            costs = [float(self.core.sizes[a] * self.core.sizes[b]) for a, b in self.pairs[old:]]
            self._solver.changeColsCost(count, np.arange(old, old + count, dtype=np.int32), np.array(costs))

    def decide(self, decided: Mapping[Pair, int]) -> None:
        """Put the given pairs in (1) or out (0), and undo earlier decisions about others.

        A pair that is out costs so much that it is taken only where the cuts cannot hold otherwise; then the value
        tells.  The program stays feasible, so there are always multipliers.
        """
        for pair in [*self._decided, *decided]:
            if self._decided.get(pair) == decided.get(pair):
                continue
            column = self._column(pair)
            self._create_columns()
            value = decided.get(pair)
            self._solver.changeColBounds(column, 1.0 if value == 1 else 0.0, 1.0)
            size = self.core.sizes[pair[0]] * self.core.sizes[pair[1]]
            self._solver.changeColCost(column, FORBIDDING if value == 0 else float(size))
        self._decided = dict(decided)

    def solve(self) -> float | None:
        """Optimal value, or None if infeasible or not solved."""
        self._solver.run()
        if self._solver.getModelStatus() != highspy.HighsModelStatus.kOptimal:
            return None
        return float(self._solver.getObjectiveValue())

    def point(self) -> F64:
        """x as a symmetric float64[n, n] matrix."""
        x = np.zeros((self.core.n, self.core.n))
        values = np.clip(np.array(self._solver.getSolution().col_value), 0.0, 1.0)
        ends = np.array(self.pairs, np.int64).reshape(-1, 2)
        x[ends[:, 0], ends[:, 1]] = values
        x[ends[:, 1], ends[:, 0]] = values
        return x

    def duals(self) -> F64:
        """Multiplier of each cut, >= 0."""
        found: F64 = np.array(self._solver.getSolution().row_dual)
        return np.clip(found, 0.0, None)

    def fractional(self, tolerance: float) -> list[Pair]:
        """Pairs with x neither 0 nor 1, the most costly and undecided ones first."""
        values = np.array(self._solver.getSolution().col_value)
        doubt = np.minimum(values, 1.0 - values)
        found = np.flatnonzero(doubt > tolerance)
        order = np.lexsort((found, -doubt[found].round(6)))
        return [self.pairs[i] for i in found[order] if self.pairs[i] not in self._decided]

    def support(self) -> list[Pair]:
        """Pairs with x nearer to 1 than to 0."""
        values = self._solver.getSolution().col_value
        return [pair for pair, x in zip(self.pairs, values, strict=True) if x > 0.5]

    def drop_idle(self, patience: int) -> None:
        """Remove cuts whose multiplier has been zero in the last ``patience`` calls."""
        duals = self.duals()
        self.idle = [0 if y > 1e-9 else rest + 1 for y, rest in zip(duals, self.idle, strict=True)]
        gone = [i for i, rest in enumerate(self.idle) if rest > patience]
        if not gone:
            return
        self._solver.deleteRows(len(gone), np.array(gone, np.int32))
        lost = set(gone)
        self.known.difference_update(self.cycles[i] for i in gone)
        self.cycles = [c for i, c in enumerate(self.cycles) if i not in lost]
        self.idle = [r for i, r in enumerate(self.idle) if i not in lost]
