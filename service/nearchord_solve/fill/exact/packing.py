"""Exact bounds from the multipliers of the relaxation.

Multipliers are floating-point numbers; they are rounded to fractions with one denominator, and the bound is worked out
again in integers (module :mod:`result` proves it for any multipliers).  So no bound rests on a tolerance.
"""

from collections.abc import Mapping, Sequence

from nearchord_solve.fill.exact.core import Core, Pair
from nearchord_solve.fill.exact.cycles import Cycle
from nearchord_solve.fill.exact.result import Packing

DENOMINATOR = 2**30


def sides_and_chords(cycle: Cycle) -> tuple[list[Pair], list[Pair]]:
    """Pairs that follow each other in a cycle, and the other pairs; smaller end first."""
    c = len(cycle)
    sides, chords = [], []
    for i in range(c):
        for j in range(i + 1, c):
            a, b = cycle[i], cycle[j]
            pair = (a, b) if a < b else (b, a)
            (sides if j == i + 1 or (i == 0 and j == c - 1) else chords).append(pair)
    return sides, chords


def rounded(multipliers: Sequence[float], scale: float = 1.0) -> list[int]:
    """Numerators over :data:`DENOMINATOR`."""
    return [int(max(0.0, y) * scale * DENOMINATOR) for y in multipliers]


def exact_bound(
    core: Core, cycles: Sequence[Cycle], numerators: Sequence[int], decided: Mapping[Pair, int]
) -> int:
    """Fill edges of the part that any fill needs which agrees with ``decided`` (pair of classes -> 1 in, 0 out)."""
    total = 0
    load: dict[Pair, int] = {}
    for cycle, y in zip(cycles, numerators, strict=True):
        if y == 0:
            continue
        sides, chords = sides_and_chords(cycle)
        needed = (len(cycle) - 3) * y
        total += needed
        for pair in chords:
            load[pair] = load.get(pair, 0) + y
        for pair in sides:
            if not core.adj[pair[0]] >> pair[1] & 1:
                total -= needed
                load[pair] = load.get(pair, 0) - needed
    for (a, b), amount in load.items():
        if (a, b) not in decided:
            total -= max(0, amount - core.sizes[a] * core.sizes[b] * DENOMINATOR)
    for (a, b), value in decided.items():
        if value:
            total += core.sizes[a] * core.sizes[b] * DENOMINATOR - load.get((a, b), 0)
    return -(-total // DENOMINATOR)


def packing_of(core: Core, cycles: Sequence[Cycle], numerators: Sequence[int]) -> Packing:
    """The packing in vertices of the part; cycles without a multiplier are left out."""
    used = [(cycle, y) for cycle, y in zip(cycles, numerators, strict=True) if y]
    rings = tuple(tuple(core.classes[v] for v in cycle) for cycle, _ in used)
    return Packing(rings, tuple(y for _, y in used), DENOMINATOR)
