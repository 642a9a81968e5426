"""Branch and cut: decide one pair after another, with the relaxation as bound.

Every case is closed by a bound worked out exactly from multipliers (module :mod:`packing`), so the tree is a
certificate if every decided pair of classes stands for one pair of the part.  Depth first; the pair to decide is
the one whose two cases raise the relaxation most (product of the two gains, over a few candidates).
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cycles import violated
from nearchord_solve.fill.exact.packing import packing_of
from nearchord_solve.fill.exact.relaxation import ADDED, LEFT_OUT, Relaxation
from nearchord_solve.fill.exact.result import Branch, Packing
from nearchord_solve.fill.exact.root import Bounds, guided, selected
from nearchord_solve.monitor import Monitor

THRESHOLDS = (1e-6, 0.5, 0.99)
CANDIDATES = 6
CUTS_A_ROUND = 100
ROUNDS_A_CASE = 15
LEAST_PROGRESS = 0.02
PATIENCE = 6
WHOLE = 1e-6
LEAF = Branch(None, -1, -1, None)


@dataclass(frozen=True, eq=False)
class _Case:
    """A node of the tree, and what is decided on the way to it: columns of the relaxation and their values."""

    node: int
    columns: I64
    values: I64

    def with_decision(self, node: int, column: int, value: int) -> "_Case":
        """The case in which one pair more is decided."""
        return _Case(node, np.append(self.columns, column), np.append(self.values, value))


class CaseSearch:
    """One search; ``tree`` grows as cases are split, ``lower`` of the bounds is raised at the end only."""

    def __init__(self, core: Core, relaxation: Relaxation, bounds: Bounds, most: int, monitor: Monitor) -> None:
        self.core = core
        self.relaxation = relaxation
        self.bounds = bounds
        self.most = most
        self.monitor = monitor
        self.tree = [LEAF]
        self.checkable = True
        self._stack = [_Case(0, np.empty(0, np.int64), np.empty(0, np.int64))]

    @property
    def target(self) -> int:
        """Cost up to which fills are still of interest."""
        return min(self.bounds.upper - 1, self.most)

    def run(self, most_nodes: int) -> bool:
        """Go on until all cases are closed (True), or until the tree has ``most_nodes`` nodes or a stop (False)."""
        while self._stack:
            if self.monitor.stop or len(self.tree) >= most_nodes:
                return False
            case = self._stack.pop()
            self.relaxation.decide(case.columns, case.values)
            packing, column = self._work(case)
            if packing is not None:
                self.tree[case.node] = Branch(None, -1, -1, packing)
            elif column is not None:
                self._split(case, column)
            else:
                self._stack.append(case)
                return False
        self.bounds.lower = max(self.bounds.lower, self.target + 1)
        return True

    def _work(self, case: _Case) -> tuple[Packing | None, int | None]:
        """Cut until the case is closed (its packing) or progress ends (a column to decide); neither if stopped."""
        values: list[float] = []
        turn = 0
        while not self.monitor.stop:
            value = self.relaxation.solve()
            if value is None:
                break
            packing = self._closed(value)
            if packing is not None:
                return packing, None
            point = self.relaxation.point()
            if turn == 0:
                guided(self.core, point, self.bounds, 1)
            values.append(value)
            turn += 1
            fractional = self.relaxation.fractional(WHOLE)
            stalled = turn > 3 and value - values[-4] < LEAST_PROGRESS
            if fractional.size and (stalled or turn > ROUNDS_A_CASE):
                return None, self._choose(case, value, fractional)
            self.relaxation.drop_idle(PATIENCE)
            cycles = violated(self.core, point, THRESHOLDS, 2 * CUTS_A_ROUND, self.monitor.cells)
            if not self.relaxation.add(selected(self.core, cycles, CUTS_A_ROUND)):
                if fractional.size:
                    return None, self._choose(case, value, fractional)
                self.bounds.offer(self.core, self.relaxation.support())
        return None, None

    def _closed(self, value: float) -> Packing | None:
        """The packing that closes the case, if the multipliers reach beyond the target."""
        if np.ceil(value - WHOLE) <= self.target:
            return None
        multipliers = self.relaxation.multipliers()
        if self.relaxation.bound(multipliers) <= self.target:
            return None
        return packing_of(self.core, self.relaxation.cuts.cycles, multipliers)

    def _choose(self, case: _Case, value: float, fractional: I64) -> int:
        """The fractional pair whose worse and better case raise the relaxation most, together."""
        best, choice = -1.0, int(fractional[0])
        for column in fractional[:CANDIDATES].tolist():
            gains = []
            for decision in (LEFT_OUT, ADDED):
                trial = case.with_decision(-1, column, decision)
                self.relaxation.decide(trial.columns, trial.values)
                reached = self.relaxation.solve()
                gains.append(min((reached if reached is not None else value) - value, 10.0 + self.target - value))
            score = max(gains[0], 1e-3) * max(gains[1], 1e-3)
            if score > best:
                best, choice = score, column
        return choice

    def _split(self, case: _Case, column: int) -> None:
        self.checkable &= int(self.relaxation.weights[column]) == 1
        first = len(self.tree)
        self.tree += [LEAF, LEAF]
        u, v = self.core.member[self.core.start[self.relaxation.pairs[column]]].tolist()
        self.tree[case.node] = Branch((min(u, v), max(u, v)), first, first + 1, None)
        self._stack.append(case.with_decision(first, column, ADDED))
        self._stack.append(case.with_decision(first + 1, column, LEFT_OUT))
