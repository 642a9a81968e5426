"""A bag with fill, as those who try all its states need it. Sets of its vertices are numbers: bit i is position i."""

from __future__ import annotations

from collections.abc import Hashable, Iterator
from dataclasses import dataclass, field
from itertools import combinations
from typing import Generic, TypeVar

Key = TypeVar("Key", bound=Hashable)


@dataclass
class OpenBag(Generic[Key]):
    """`lead`: vertices of the adhesion, which come first; `apart`: by position, what it is not joined to in the graph;
    `worths`: see `worths.rows_of_worths`; `most`: vertices that worths may have; `below`: the adhesion and the table of
    each bag below whose adhesion holds fill."""

    size: int
    lead: int
    apart: list[int]
    worths: list[dict[int, int]]
    most: int
    below: list[tuple[int, dict[Key, int]]] = field(default_factory=list)

    @property
    def adhesion(self) -> int:
        """The vertices of the adhesion."""
        return (1 << self.lead) - 1

    @property
    def fill_in_adhesion(self) -> bool:
        """Whether two vertices of the adhesion are not joined in the graph."""
        return any(apart & self.adhesion for apart in self.apart[: self.lead])

    def gain(self, position: int, others: tuple[int, ...]) -> int:
        """What a vertex adds to what chosen ones before it, as single bits, are worth here.

        Worths of vertices of the adhesion alone are counted further up.
        """
        if position < self.lead:
            return 0
        row = self.worths[position]
        gain = row[0]
        if len(row) > 1:
            for size in range(1, min(self.most - 1, len(others)) + 1):
                for some in combinations(others, size):
                    gain += row.get(sum(some), 0)
        return gain


def bits(mask: int) -> Iterator[int]:
    """The positions in a set, ascending."""
    while mask:
        lowest = mask & -mask
        yield lowest.bit_length() - 1
        mask ^= lowest


def moved(mask: int, where: list[int]) -> int:
    """The same set by positions of another bag."""
    return sum(1 << where[position] for position in bits(mask))
