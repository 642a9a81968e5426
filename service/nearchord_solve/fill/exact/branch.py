"""Branch and cut: decide one pair after another, with the relaxation as bound.

Every case is closed by a bound worked out exactly from multipliers (module :mod:`packing`), so the tree is a
certificate if every decided pair of classes stands for one pair of the part.  Depth first; the pair to decide is
the one whose two cases raise the relaxation most (product of the two gains, over a few candidates).
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.fill.exact.core import Core, Pair
from nearchord_solve.fill.exact.cycles import violated
from nearchord_solve.fill.exact.packing import exact_bound, packing_of, rounded
from nearchord_solve.fill.exact.relaxation import Relaxation
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


@dataclass
class _Case:
    """Pairs decided on the way to a node of the tree: 1 in the fill, 0 not."""

    node: int
    decided: dict[Pair, int]


class CaseSearch:
    """One search; ``tree`` grows as cases are split, ``lower`` of the bounds is raised at the end only."""

    def __init__(self, core: Core, relaxation: Relaxation, bounds: Bounds, most: int, monitor: Monitor) -> None:
        self.core = core
        self.relaxation = relaxation
        self.bounds = bounds
        self.most = most
        self.monitor = monitor
        self.tree = [Branch(None, -1, -1, None)]
        self.checkable = True
        self._stack = [_Case(0, {})]

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
            self.relaxation.decide(case.decided)
            packing, pair = self._work(case)
            if packing is not None:
                self.tree[case.node] = Branch(None, -1, -1, packing)
            elif pair is not None:
                self._split(case, pair)
            else:
                self._stack.append(case)
                return False
        self.bounds.lower = max(self.bounds.lower, self.target + 1)
        return True

    def _work(self, case: _Case) -> tuple[Packing | None, Pair | None]:
        """Cut until the case is closed (its packing) or progress ends (a pair to decide); neither if stopped."""
        values: list[float] = []
        turn = 0
        while not self.monitor.stop:
            value = self.relaxation.solve()
            if value is None:
                break
            packing = self._closed(case, value)
            if packing is not None:
                return packing, None
            point = self.relaxation.point()
            if turn == 0:
                guided(self.core, point, self.bounds, 1)
            values.append(value)
            turn += 1
            fractional = self.relaxation.fractional(WHOLE)
            stalled = turn > 3 and value - values[-4] < LEAST_PROGRESS
            if fractional and (stalled or turn > ROUNDS_A_CASE):
                return None, self._choose(case, value)
            self.relaxation.drop_idle(PATIENCE)
            cycles = violated(self.core, point, THRESHOLDS, 2 * CUTS_A_ROUND, self.monitor.cells)
            if not self.relaxation.add(selected(cycles, CUTS_A_ROUND)):
                if fractional:
                    return None, self._choose(case, value)
                self.bounds.offer(self.core, self.relaxation.support())
        return None, None

    def _closed(self, case: _Case, value: float) -> Packing | None:
        """The packing that closes the case, if the multipliers reach beyond the target."""
        if np.ceil(value - WHOLE) <= self.target:
            return None
        numerators = rounded(self.relaxation.duals().tolist())
        if exact_bound(self.core, self.relaxation.cycles, numerators, case.decided) <= self.target:
            return None
        return packing_of(self.core, self.relaxation.cycles, numerators)

    def _choose(self, case: _Case, value: float) -> Pair:
        """The fractional pair whose worse and better case raise the relaxation most, together."""
        best, choice = -1.0, None
        for pair in self.relaxation.fractional(WHOLE)[:CANDIDATES]:
            gains = []
            for decision in (0, 1):
                self.relaxation.decide({**case.decided, pair: decision})
                reached = self.relaxation.solve()
                gains.append(min((reached if reached is not None else value) - value, 10.0 + self.target - value))
            score = max(gains[0], 1e-3) * max(gains[1], 1e-3)
            if score > best:
                best, choice = score, pair
        assert choice is not None
        return choice

    def _split(self, case: _Case, pair: Pair) -> None:
        self.checkable &= self.core.sizes[pair[0]] * self.core.sizes[pair[1]] == 1
        first = len(self.tree)
        self.tree += [Branch(None, -1, -1, None), Branch(None, -1, -1, None)]
        named = (self.core.classes[pair[0]][0], self.core.classes[pair[1]][0])
        self.tree[case.node] = Branch((min(named), max(named)), first, first + 1, None)
        self._stack.append(_Case(first, {**case.decided, pair: 1}))
        self._stack.append(_Case(first + 1, {**case.decided, pair: 0}))
