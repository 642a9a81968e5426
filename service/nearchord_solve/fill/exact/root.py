"""Cutting planes: a lower bound from the relaxation and fills guided by its point, until they meet or progress ends."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import F64, I32
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.cuts import Multipliers
from nearchord_solve.fill.exact.cycles import Cycles, violated
from nearchord_solve.fill.exact.greedy import completed, prices_of
from nearchord_solve.fill.exact.kernels.cuts import pick
from nearchord_solve.fill.exact.kernels.greedy import BY_FILL
from nearchord_solve.fill.exact.relaxation import Relaxation
from nearchord_solve.monitor import Monitor

THRESHOLDS = (1e-6, 0.5, 0.99, 0.3, 0.7)
MOST_ROUNDS = 400
PATIENCE = 20
LEAST_PROGRESS = 0.02
CUTS_A_ROUND = 400
CUTS_A_PAIR = 6


@dataclass
class Bounds:
    """Where the search for one core stands.

    ``best``: the cheapest fill found (pairs of classes), of cost ``upper``; every fill costs at least ``lower``, which
    ``cycles`` with ``multipliers`` prove when ``lower`` came from them.
    """

    best: I32
    upper: int
    cycles: Cycles
    multipliers: Multipliers
    lower: int = 0

    @classmethod
    def above(cls, core: Core, best: I32) -> "Bounds":
        """A fill is known and no lower bound."""
        return cls(best, core.cost(best), Cycles.none(), Multipliers(np.empty(0, np.int64), 1))

    @property
    def closed(self) -> bool:
        """Whether the bounds meet."""
        return self.lower >= self.upper

    def offer(self, core: Core, pairs: I32) -> None:
        """Keep a fill if it is cheaper."""
        cost = core.cost(pairs)
        if cost < self.upper:
            self.best, self.upper = pairs, cost

    def raise_to(self, lower: int, cycles: Cycles, multipliers: Multipliers) -> None:
        """Keep a lower bound if it is better."""
        if lower > self.lower:
            self.lower, self.cycles, self.multipliers = lower, cycles, multipliers


def cut(core: Core, bounds: Bounds, most: int, monitor: Monitor) -> Relaxation:
    """Improve ``bounds`` by rounds of cuts until closed, over ``most``, out of cuts or of progress, or stopped."""
    relaxation = Relaxation(core, monitor)
    values: list[float] = []
    relaxation.add(found_at(core, np.empty((0, 0)), monitor))
    for turn in range(MOST_ROUNDS):
        value = relaxation.solve()
        if value is None or monitor.stop:
            break
        values.append(value)
        if np.ceil(value - 1e-6) > bounds.lower:
            multipliers = relaxation.multipliers()
            bounds.raise_to(relaxation.bound(multipliers), relaxation.cuts.cycles, multipliers)
        point = relaxation.point()
        if turn % 3 == 2:
            guided(core, point, bounds, 1)
        if bounds.closed or bounds.lower > most:
            break
        fresh = found_at(core, point, monitor)
        relaxation.drop_idle(4)
        stalled = len(values) > PATIENCE and value - values[-PATIENCE] < LEAST_PROGRESS
        if stalled or not relaxation.add(fresh):
            break
    if not bounds.closed and relaxation.cuts.count and not monitor.stop and relaxation.solve() is not None:
        guided(core, relaxation.point(), bounds, 24)
    return relaxation


def found_at(core: Core, point: F64, monitor: Monitor) -> Cycles:
    """A round of cuts violated at ``point``."""
    return selected(core, violated(core, point, THRESHOLDS, 3 * CUTS_A_ROUND, monitor.cells), CUTS_A_ROUND)


def selected(core: Core, cycles: Cycles, most: int) -> Cycles:
    """The first ones, passing over those whose chords are all used often already."""
    return cycles.take(pick(core.n, cycles.ptr, cycles.vertex, most, CUTS_A_PAIR))


def guided(core: Core, x: F64, bounds: Bounds, tries: int) -> None:
    """Greedy eliminations in which a fill edge is the cheaper the closer x is to 1 there."""
    random = np.random.default_rng(tries)
    for turn in range(tries):
        floor = (0.001, 0.05, 0.2)[turn % 3]
        noise = random.random(core.n) * 0.3 * (turn // 3)
        price = prices_of(core) * (1.0 - x + floor)
        bounds.offer(core, completed(core, BY_FILL, price, noise))
        if bounds.closed:
            break
