"""Structures kept from one solve for later ones on the same graph, as flat arrays.

A structure depends on the graph, and on the budget only in a few ways, which :meth:`Kept.serves` looks at: a kept
structure is used where building would give the very same one, so that it never changes an answer.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.errors import SolverError
from nearchord_solve.fill.cores import Cores
from nearchord_solve.kernels.layout import EASY, STATES, Forest, Numbering
from nearchord_solve.memory import most_fill
from nearchord_solve.structure import Structure

Arrays = Mapping[str, NDArray[Any]]

_HEADER = "header"
_NO_LIMIT = -1


@dataclass(frozen=True, eq=False)
class Kept:
    """A structure of a graph of n vertices and m edges, built within ``budget``."""

    n: int
    m: int
    budget: Budget
    structure: Structure

    def serves(self, budget: Budget) -> bool:
        """Whether building within ``budget`` would give this structure.

        The same budget always does.  Otherwise the structure must come from the search order with the fewest
        states, which any budget leads to that admits its fill and, core by core, its states and those that are taken
        without looking for fewer, that leaves room for the fill of the order, and in which no core is left that
        another order is tried for.
        """
        if budget == self.budget:
            return True
        structure = self.structure
        forest = structure.forest
        states: I64 = forest.figures[:, STATES]
        least = max(int(states.max(initial=0)), EASY * int(np.diff(forest.core_slot).max(initial=0)))
        return (
            structure.plain
            and (budget.fill is None or structure.fill <= budget.fill)
            and least <= min(budget.states, self.budget.states)
            and structure.numbering.fill.size <= most_fill(self.n, self.m, budget.memory)
            and not structure.coarse(budget)
        )

    def arrays(self) -> dict[str, NDArray[Any]]:
        """Everything as flat arrays by name; :meth:`from_arrays` reads them."""
        structure, budget = self.structure, self.budget
        limit = _NO_LIMIT if budget.fill is None else budget.fill
        cores = structure.cores
        header = [
            self.n,
            self.m,
            limit,
            budget.states,
            budget.memory,
            int(structure.plain),
            cores.cliques,
            cores.largest,
        ]
        return {
            _HEADER: np.array(header, np.int64),
            **structure.numbering._asdict(),
            "core_ptr": cores.ptr,
            "core_place": cores.place,
            **structure.forest._asdict(),
            "figures": structure.forest.figures.ravel(),
        }

    @classmethod
    def from_arrays(cls, n: int, m: int, arrays: Arrays) -> "Kept":
        """Read what :meth:`arrays` wrote for a graph of n vertices and m edges, without copying.

        The arrays must be writable, contiguous and aligned.  Raises SolverError if anything is missing, of another
        type or size, or points outside.  O(n + m).
        """
        read = _Reader(arrays)
        header = read.take(_HEADER, np.int64, 8).tolist()
        if header[:2] != [n, m]:
            raise SolverError("kept", f"is of a graph of {header[0]} vertices and {header[1]} edges")
        limit, states, memory, plain, cliques, largest = header[2:]
        numbering = _numbering(read, n, m)
        cores = _cores(read, n, cliques, largest)
        forest = _forest(read, n, cores.ptr.size - 1)
        read.within("core", numbering.core, -1, cores.ptr.size - 1)
        budget = Budget(None if limit == _NO_LIMIT else limit, states, memory)
        return cls(n, m, budget, Structure(numbering, cores, forest, bool(plain)))


class _Reader:
    """Arrays by name, each checked when it is taken."""

    def __init__(self, arrays: Arrays) -> None:
        self._arrays = arrays

    def take(self, name: str, dtype: type[np.generic], size: int | None = None) -> NDArray[Any]:
        """A flat array of the given type and, if ``size`` is not None, size."""
        array = self._arrays.get(name)
        if array is None or array.dtype != dtype or array.ndim != 1 or not array.flags.carray:
            raise SolverError("kept", f"{name} is not a flat array of {np.dtype(dtype).name}")
        if size is not None and array.size != size:
            raise SolverError("kept", f"{name} has {array.size} entries, not {size}")
        return array

    def rows(self, name: str, size: int | None = None, end: int | None = None) -> I64:
        """Row pointers: they begin at 0, never fall, and end at ``end`` if that is not None."""
        ptr = self.take(name, np.int64, size)
        if ptr.size == 0 or ptr[0] != 0 or bool((ptr[1:] < ptr[:-1]).any()) or (end is not None and ptr[-1] != end):
            raise SolverError("kept", f"{name} are no row pointers")
        return ptr

    def within(self, name: str, array: NDArray[Any], low: int, high: int) -> NDArray[Any]:
        """Numbers from ``low`` to below ``high``."""
        if array.size and (int(array.min()) < low or int(array.max()) >= high):
            raise SolverError("kept", f"{name} points outside")
        return array

    def numbers(self, name: str, size: int | None, high: int, low: int = 0) -> NDArray[Any]:
        """An int32 array of numbers from ``low`` to below ``high``."""
        return self.within(name, self.take(name, np.int32, size), low, high)


def _numbering(read: _Reader, n: int, m: int) -> Numbering:
    fill_end = read.take("fill_end", np.int64, n + 1)
    fill = read.numbers("fill", None, n)
    if fill_end[-1] != 0 or int(fill_end[0]) != fill.size or bool((fill_end[1:] > fill_end[:-1]).any()):
        raise SolverError("kept", "fill_end are no row pointers")
    return Numbering(
        order=read.numbers("order", n, n),
        low_ptr=read.rows("low_ptr", n + 1, m),
        low=read.numbers("low", m, n),
        parent=read.numbers("parent", n, n, -1),
        fill_end=fill_end,
        fill=fill,
        core=read.take("core", np.int32, n),
    )


def _cores(read: _Reader, n: int, cliques: int, largest: int) -> Cores:
    place = read.numbers("core_place", None, n)
    return Cores(read.rows("core_ptr", None, place.size), place, cliques, largest)


def _forest(read: _Reader, n: int, cores: int) -> Forest:
    slot_place = read.numbers("slot_place", None, n)
    slots = slot_place.size
    slot_fill = read.numbers("slot_fill", None, slots)
    bag_kind = read.take("bag_kind", np.uint8)
    bags = bag_kind.size
    bag_slot = read.numbers("bag_slot", None, slots)
    return Forest(
        core_top=read.numbers("core_top", cores, n),
        core_slot=read.rows("core_slot", cores + 1, slots),
        core_anchors=read.numbers("core_anchors", cores, slots + 1),
        core_bag=read.rows("core_bag", cores + 1, bags),
        figures=read.take("figures", np.int64, 6 * cores).reshape(cores, 6),
        slot_place=slot_place,
        slot_fill_ptr=read.rows("slot_fill_ptr", slots + 1, slot_fill.size),
        slot_fill=slot_fill,
        bag_ptr=read.rows("bag_ptr", bags + 1, bag_slot.size),
        bag_slot=bag_slot,
        bag_adhesion=read.numbers("bag_adhesion", bags, slots + 1),
        bag_above=read.numbers("bag_above", bags, bags, -1),
        bag_kind=bag_kind,
    )


@dataclass(eq=False)
class Reuse:
    """What a solve is given from an earlier one, and what it leaves for later ones (None if nothing new)."""

    given: Kept | None = None
    made: Kept | None = None

    def serving(self, budget: Budget) -> Structure | None:
        """The structure given, if it serves."""
        return self.given.structure if self.given is not None and self.given.serves(budget) else None
