"""A plan of a small graph: independent sets with lengths, one after the other in a frame."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I32, I64

Intervals = list[tuple[int, int]]


@dataclass(frozen=True, eq=False)
class Plan:
    """``member`` bool[k, p]: independent sets; ``lengths``: k whole numbers >= 0 over ``denominator``."""

    member: NDArray[np.bool_]
    lengths: Sequence[int]
    denominator: int = 1

    @property
    def frame(self) -> Fraction:
        """How long the plan takes."""
        return Fraction(sum(self.lengths), self.denominator)

    def in_units(self, unit: int) -> list[int]:
        """Lengths in ``unit``-ths, rounded up where they are no whole number of them."""
        return [-(-length * unit // self.denominator) for length in self.lengths]

    def times(self, demand: Sequence[int], unit: int) -> list[Intervals]:
        """When each vertex is served, in ``unit``-ths, exactly as long as it demands: ascending, apart from each other.

        The sets must serve each vertex at least that long.
        """
        lengths = self.in_units(unit)
        starts = np.concatenate((np.zeros(1, object), np.cumsum(np.array(lengths, object)))).tolist()
        return [
            _served([(starts[i], starts[i + 1]) for i in np.flatnonzero(self.member[:, v]).tolist()], need * unit)
            for v, need in enumerate(demand)
        ]


def _served(intervals: Intervals, need: int) -> Intervals:
    """The first ``need`` of the time in ``intervals``, which follow each other."""
    served: Intervals = []
    for start, end in intervals:
        end = min(end, start + need)
        if end == start:
            continue
        need -= end - start
        if served and served[-1][1] == start:
            served[-1] = (served[-1][0], end)
        else:
            served.append((start, end))
    assert need == 0, "the sets of a plan serve every vertex"
    return served


def plan_of_classes(colour: I32, copy_of: I64, size: int) -> Plan:
    """The plan of a proper colouring of copies of ``size`` vertices; ``copy_of`` says of which each is one."""
    member = np.zeros((int(colour.max(initial=-1)) + 1, size), np.bool_)
    member[colour, copy_of] = True
    return Plan(member, [1] * member.shape[0])


class Mapping:
    """Moves the pieces of one frame about in another, so that given vertices are served when they are to be."""

    def __init__(self, pairs: Sequence[tuple[Intervals, Intervals]], length: int, room: int) -> None:
        """``pairs``: of each given vertex, when it is served here and when there, equally long, all apart.

        ``length``: of the frame here; ``room``: of the other one, at least as long.
        """
        here = sorted(interval for mine, _ in pairs for interval in mine)
        there = sorted(interval for _, other in pairs for interval in other)
        self._pieces: list[tuple[int, int, int]] = []
        for mine, other in [*pairs, (gaps(here, length), gaps(there, room))]:
            self._lay(mine, other)
        self._pieces.sort()

    def _lay(self, mine: Intervals, other: Intervals) -> None:
        """Lay the intervals ``mine`` over the first of ``other``, in order."""
        at, spent = 0, 0
        for start, end in mine:
            while start < end:
                begin, close = other[at]
                size = min(end - start, close - begin - spent)
                self._pieces.append((start, start + size, begin + spent))
                start += size
                spent += size
                if begin + spent == close:
                    at, spent = at + 1, 0

    def moved(self, intervals: Intervals) -> Intervals:
        """Where ``intervals`` of this frame come to lie in the other one."""
        found: Intervals = []
        for start, end in intervals:
            for low, high, to in self._pieces:
                if low < end and start < high:
                    begin, close = max(low, start), min(high, end)
                    found.append((to + begin - low, to + close - low))
        found.sort()
        merged: Intervals = []
        for start, end in found:
            if merged and merged[-1][1] == start:
                merged[-1] = (merged[-1][0], end)
            else:
                merged.append((start, end))
        return merged


def gaps(intervals: Intervals, length: int) -> Intervals:
    """What ascending intervals, apart from each other, leave free in 0..length."""
    bounds = [0, *(end for pair in intervals for end in pair), length]
    return [(start, end) for start, end in zip(bounds[::2], bounds[1::2], strict=True) if start < end]
