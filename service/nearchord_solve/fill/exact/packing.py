"""Exact bounds from the multipliers of the relaxation.

Multipliers are floating-point numbers; they are rounded to fractions with one denominator, and the bound is worked out
again in integers (module :mod:`result` proves it for any multipliers).  So no bound rests on a tolerance.
"""

from collections.abc import Mapping, Sequence

import numpy as np

from nearchord_solve.fill.exact.core import Core, Pair
from nearchord_solve.fill.exact.cycles import Cycle
from nearchord_solve.fill.exact.result import Packing

DENOMINATOR = 2**30


def sides_and_chords(cycle: Cycle) -> tuple[list[Pair], list[Pair]]:
    """Pairs that follow each other in a cycle, and the other pairs; smaller end first."""
    c = len(cycle)
    sides: list[Pair] = []
    chords: list[Pair] = []
    for i in range(c):
        for j in range(i + 1, c):
            a, b = cycle[i], cycle[j]
            pair = (a, b) if a < b else (b, a)
            (sides if j == i + 1 or (i == 0 and j == c - 1) else chords).append(pair)
    return sides, chords


def rounded(multipliers: Sequence[float], scale: float = 1.0) -> list[int]:
    """Numerators over :data:`DENOMINATOR`."""
    return [int(max(0.0, y) * scale * DENOMINATOR) for y in multipliers]


def summed(core: Core, cycles: Sequence[Cycle], numerators: Sequence[int]) -> tuple[int, dict[Pair, int]]:
    """Constant term and load of each pair, over :data:`DENOMINATOR`."""
    constant = 0
    load: dict[Pair, int] = {}
    for cycle, y in zip(cycles, numerators, strict=True):
        if y == 0:
            continue
        sides, chords = sides_and_chords(cycle)
        needed = (len(cycle) - 3) * y
        constant += needed
        for pair in chords:
            load[pair] = load.get(pair, 0) + y
        for pair in sides:
            if not core.adj[pair[0]] >> pair[1] & 1:
                constant -= needed
                load[pair] = load.get(pair, 0) - needed
    return constant, load


def weight(core: Core, pair: Pair) -> int:
    """What the pair costs, over :data:`DENOMINATOR`."""
    return core.sizes[pair[0]] * core.sizes[pair[1]] * DENOMINATOR


def exact_bound(core: Core, cycles: Sequence[Cycle], numerators: Sequence[int], decided: Mapping[Pair, int]) -> int:
    """Fill edges of the part that any fill needs which agrees with ``decided`` (pair of classes -> 1 in, 0 out)."""
    total, load = summed(core, cycles, numerators)
    total -= sum(max(0, amount - weight(core, pair)) for pair, amount in load.items() if pair not in decided)
    total += sum(weight(core, pair) - load.get(pair, 0) for pair, value in decided.items() if value)
    return -(-total // DENOMINATOR)


def prices(core: Core, cycles: Sequence[Cycle], numerators: Sequence[int]) -> tuple[int, dict[Pair, int]]:
    """``base`` and prices >= 0 over :data:`DENOMINATOR`: a fill costs at least ``base`` plus the prices of its pairs.

    The weight of a fill is its load plus weight - load over its pairs; the load of all of it is at least the constant
    term.  Pairs that are not listed have their weight as price.
    """
    total, load = summed(core, cycles, numerators)
    base = total - sum(max(0, amount - weight(core, pair)) for pair, amount in load.items())
    return base, {pair: max(0, weight(core, pair) - amount) for pair, amount in load.items()}


def packing_of(core: Core, cycles: Sequence[Cycle], numerators: Sequence[int]) -> Packing:
    """The packing in vertices of the part; cycles without a multiplier are left out."""
    used = [(cycle, y) for cycle, y in zip(cycles, numerators, strict=True) if y]
    groups = [core.classes[v] for cycle, _ in used for v in cycle]
    return Packing(
        np.cumsum([0, *(len(cycle) for cycle, _ in used)], dtype=np.int64),
        np.cumsum([0, *map(len, groups)], dtype=np.int64),
        np.array([v for group in groups for v in group], np.int32),
        np.array([y for _, y in used], np.int64),
        DENOMINATOR,
    )
