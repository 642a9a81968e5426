"""The k best independent sets of a graph after its sweep, one after the other.

The outward pass decides at points, one after the other: at a place outside fill cores whether it is chosen, in a bag
of a core which homes are; what was chosen around a point before is all that its decision depends on.

*Cost of a decision.*  Let S be any independent set, whose decisions are followed instead of the best ones.  Its
weight is the optimum minus the sum of the costs of its decisions, where a decision costs the difference between the
best decision, given what S has around the point, and its own; hence no cost is negative.  Proof, along the inward
pass, which keeps: w(S) = base + (residuals of the chosen places not settled yet) + (kept parts of messages that S
meets) - (costs of the points settled).  A place i outside cores, with residual r and g = max(0, r), gives g to the
base and takes g from all of L(i).  {i} + L(i) is a clique.  If S has a vertex of L(i), what is given and what is
taken cancel, i cannot be chosen, and there is one decision, of cost 0.  Otherwise S has r or 0 of i where the base
has g: one decision costs 0, the other |r|.  A bag of a core adds up what it is worth, M(t), given the part t of S in
its adhesion; S has the value of the state S & bag instead: the difference is the cost.  At the end nothing is left
but base and costs.

*The tree of sets.*  Call a decision other than that of the outward pass, given the same surroundings, a deviation.  A
set is known by its deviations, as all else follows.  Taking away the last one leaves another set, of no greater cost:
this makes all independent sets a tree, rooted at the set that the outward pass chose.  Below a set are those with one
deviation more, at a later point; where a point has several, they come one after the other by cost, the next one only
when the one before has been taken.  So the sets are found in the order of their cost by a heap, each exactly once,
and k of them need k times what follows from one deviation.  Of the deviations of a set only the k - (sets found)
cheapest are kept, and only those cheaper than the k-th cheapest known anywhere.  What a set inherits from the set
above stays so, except at points whose surroundings have changed.

Equal weights come in a fixed order: that in which they entered the heap.  (The heap over deviations follows Lawler,
Management Science 18 (1972) 401-405, who splits what is left by the first decision that differs.)
"""

import heapq
from bisect import insort
from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import BAG_FILL
from nearchord_solve.monitor import Monitor
from nearchord_solve.sweep.independent import Swept
from nearchord_solve.sweep.kernels import deviate
from nearchord_solve.sweep.kernels.passes import choose_bag, choose_plain, link_bags, senders


@dataclass(frozen=True, eq=False)
class Others:
    """The deviations at one bag, by cost: what each costs and the places of its homes."""

    cost: list[int]
    homes: list[I32]


@dataclass(frozen=True, eq=False)
class Offers:
    """Single deviations of a set, by cost: int64[k], int64[k]."""

    point: I64
    cost: I64


@dataclass(order=True)
class Open:
    """A set in the heap: that number ``above`` with deviation ``rank`` at a point on top."""

    cost: int
    serial: int
    above: int = field(compare=False)
    point: int = field(compare=False)
    rank: int = field(compare=False)
    others: Others | None = field(compare=False)


@dataclass(frozen=True, eq=False)
class Known:
    """A set found: its cost, its places in bits, and its deviations."""

    cost: int
    bits: U8
    offers: Offers


class BestSets:
    """A running search for the ``most`` best sets.  O(n + m + states) before the first one."""

    def __init__(self, graph: Graph, swept: Swept, most: int) -> None:
        self._swept = swept
        self._most = most
        self._n = graph.n
        self._points = points_of(graph, swept)
        size = self._points.point.size
        self._links = link_bags(swept.structure.forest.bag_above, swept.structure.forest.bag_kind)
        self._where = np.full(swept.structure.forest.slot_place.size, -1, np.int32)
        self._dirty = np.zeros(size, np.uint8)
        self._met, self._free = np.empty(size, np.int32), np.empty(size, np.uint8)
        self._state = np.zeros(2, np.int64)
        self._heap: list[Open] = []
        self._serial = 0
        self._costs: list[int] = []  # the ``most`` least costs known, ascending
        self._at_bag: dict[tuple[int, bytes], Others] = {}
        self.known: list[Known] = []

    def run(self, most_bytes: int, monitor: Monitor) -> bool:
        """Find the sets; False if stopped or if they take more than ``most_bytes``."""
        self._root()
        held = self.known[0].bits.nbytes
        while self._heap and len(self.known) < self._most:
            if monitor.stop or held > most_bytes:
                return False
            self._take(heapq.heappop(self._heap))
            held += self.known[-1].bits.nbytes + self.known[-1].offers.cost.nbytes * 2
        return True

    def by_place(self, number: int) -> U8:
        """Set ``number``, uint8[n] by place."""
        return np.unpackbits(self.known[number].bits, count=self._n)

    def _root(self) -> None:
        """Begin with what the outward pass chose; all its points are looked at once."""
        assert self._swept.chosen is not None
        self._costs.append(0)
        chosen = self._swept.chosen[self._swept.structure.numbering.order]
        alone = self._points.point >= 0
        self._dirty[:] = alone
        self._state[:] = alone.sum(), 0
        met, free = self._follow(-1, np.empty(0, np.int32), chosen)
        bags = np.flatnonzero(~alone).astype(np.int32)
        met, free = np.concatenate((met, bags)), np.concatenate((free, np.ones(bags.size, np.uint8)))
        self._keep(0, chosen, met, free, -1, Offers(np.empty(0, np.int64), np.empty(0, np.int64)))

    def _take(self, node: Open) -> None:
        """Write out a set and open those right below it."""
        above = self.known[node.above]
        chosen = self.by_place(node.above)
        point = int(self._points.point[node.point])
        if node.others is None:
            changed = np.array([point], np.int32)
            chosen[point] ^= 1
        else:
            changed = self._replace_homes(-1 - point, node.others.homes[node.rank], chosen)
            if node.rank + 1 < len(node.others.cost):
                cost = above.cost + node.others.cost[node.rank + 1]
                self._open(cost, node.above, node.point, node.rank + 1, node.others)
        self._state[:] = 0
        met, free = self._follow(node.point, changed, chosen)
        self._keep(node.cost, chosen, met, free, node.point, above.offers)

    def _replace_homes(self, bag: int, homes: I32, chosen: U8) -> I32:
        """Choose other homes in a bag; returns the places that changed."""
        mine = self._homes(bag)
        before = chosen[mine]
        chosen[mine] = 0
        chosen[homes] = 1
        changed: I32 = mine[before != chosen[mine]]
        return changed

    def _follow(self, at: int, changed: I32, chosen: U8) -> tuple[I32, U8]:
        """Choose anew what follows from changes at a point: the points looked at, and which of them are free."""
        numbering, residual = self._swept.structure.numbering, self._swept.residual
        while True:
            deviate.mark_all(changed, at, self._points, numbering, self._dirty, self._state)
            at = deviate.follow(
                at, self._points, numbering, residual, self._dirty, chosen, self._met, self._free, self._state
            )
            if at < 0:
                count = self._state[1]
                return self._met[:count].copy(), self._free[:count].copy()
            changed = self._choose_homes(-1 - int(self._points.point[at]), chosen)

    def _choose_homes(self, bag: int, chosen: U8) -> I32:
        """Choose the homes of a bag as the outward pass would; returns the places that changed."""
        swept, forest = self._swept, self._swept.structure.forest
        mine = self._homes(bag)
        before = chosen[mine]
        chosen[mine] = 0
        if forest.bag_kind[bag] & BAG_FILL:
            below = senders(bag, *self._links)
            choose_bag(bag, forest, below, swept.tries, self._where, swept.residual, chosen)
        else:
            choose_plain(bag, forest, swept.residual, chosen)
        changed: I32 = mine[before != chosen[mine]]
        return changed

    def _keep(self, cost: int, chosen: U8, met: I32, free: U8, start: int, above: Offers) -> None:
        """Record a set and open what is right below it, unless there is enough that is cheaper."""
        number = len(self.known)
        room = self._room(cost)
        inherits = (above.point > start) & (above.cost < room) & ~np.isin(above.point, met)
        parts = [(above.point[inherits], above.cost[inherits]), *self._deviations(met, free, chosen, room)]
        point = np.concatenate([part[0] for part in parts])
        each = np.concatenate([part[1] for part in parts])
        order = np.lexsort((point, each))[: self._most - number - 1]
        offers = Offers(point[order], each[order])
        self.known.append(Known(cost, np.packbits(chosen), offers))
        for at, more in zip(offers.point.tolist(), offers.cost.tolist(), strict=True):
            place = int(self._points.point[at])
            others = None if place >= 0 else self._others(-1 - place, chosen)
            if not self._open(cost + more, number, at, 0, others):
                break

    def _room(self, cost: int) -> int:
        """Deviations of a set of this cost matter only if they cost less than this."""
        full = len(self._costs) >= self._most
        return self._costs[-1] - cost if full else 2**62

    def _deviations(self, met: I32, free: U8, chosen: U8, room: int) -> Iterable[tuple[I64, I64]]:
        """Points among those met with a deviation cheaper than ``room``, and its cost."""
        what = self._points.point[met]
        alone = (what >= 0) & (free != 0)
        cost = np.abs(self._swept.residual[what[alone]])
        cheap = cost < room
        yield met[alone][cheap].astype(np.int64), cost[cheap]
        bags = [(int(at), self._others(-1 - int(i), chosen)) for at, i in zip(met, what, strict=True) if i < 0]
        found = [(at, others.cost[0]) for at, others in bags if others.cost and others.cost[0] < room]
        yield np.array([at for at, _ in found], np.int64), np.array([more for _, more in found], np.int64)

    def _open(self, cost: int, above: int, point: int, rank: int, others: Others | None) -> bool:
        """Put a set into the heap; False if enough are cheaper or as cheap."""
        if len(self._costs) >= self._most:
            if cost >= self._costs[-1]:
                return False
            self._costs.pop()
        insort(self._costs, cost)
        self._serial += 1
        heapq.heappush(self._heap, Open(cost, self._serial, above, point, rank, others))
        return True

    def _homes(self, bag: int) -> I32:
        forest = self._swept.structure.forest
        begin = forest.bag_ptr[bag] + forest.bag_adhesion[bag]
        slots: I32 = forest.bag_slot[begin : forest.bag_ptr[bag + 1]]
        homes: I32 = forest.slot_place[slots]
        return homes

    def _others(self, bag: int, chosen: U8) -> Others:
        """The deviations at a bag next to what is chosen in its adhesion; they are kept for the next who asks."""
        forest = self._swept.structure.forest
        begin = forest.bag_ptr[bag]
        adhesion = chosen[forest.slot_place[forest.bag_slot[begin : begin + forest.bag_adhesion[bag]]]]
        key = (bag, adhesion.tobytes())
        if key not in self._at_bag:
            if forest.bag_kind[bag] & BAG_FILL:
                self._at_bag[key] = self._with_fill(bag, chosen)
            else:
                self._at_bag[key] = self._without_fill(bag, bool(adhesion.any()), chosen)
        return self._at_bag[key]

    def _with_fill(self, bag: int, chosen: U8) -> Others:
        structure, swept = self._swept.structure, self._swept
        most = self._most - len(self.known) + 1
        values, sizes = np.empty(most, np.int64), np.empty(most, np.int64)
        count, homes = deviate.best_states(
            bag, structure.forest, senders(bag, *self._links), swept.tries, self._where, swept.residual, chosen,
            np.empty(most, np.int32), values, sizes,
        )  # fmt: skip
        values = values[:count]
        with np.errstate(over="ignore"):
            cost = (values - values[0]).max() - (values - values[0])
        sets = [np.sort(homes[row, : sizes[row]]) for row in range(count)]
        return self._other_than(chosen[self._homes(bag)], self._homes(bag), cost, sets)

    def _without_fill(self, bag: int, closed: bool, chosen: U8) -> Others:
        """Homes of a bag without fill are decided from the first to the last: at most one is chosen."""
        homes = self._homes(bag)
        worth = self._swept.residual[homes]
        if closed:
            return Others([], [])
        gain = np.maximum(worth, 0)
        skipped = np.cumsum(gain)
        cost = np.append(skipped - worth, skipped[-1])
        sets = [*homes.reshape(-1, 1), np.empty(0, np.int32)]
        return self._other_than(chosen[homes], homes, cost, sets)

    @staticmethod
    def _other_than(taken: U8, homes: I32, cost: I64, sets: list[I32]) -> Others:
        """All but the set taken, by cost, ties to the set of the lowest places."""
        own = np.sort(homes[taken != 0]).tolist()
        order = sorted(range(len(sets)), key=lambda row: (int(cost[row]), sets[row].tolist()))
        rest = [row for row in order if sets[row].tolist() != own]
        return Others([int(cost[row]) for row in rest], [sets[row] for row in rest])


def points_of(graph: Graph, swept: Swept) -> deviate.Points:
    """The points in the order of the outward pass.  O(n + m + bags)."""
    structure = swept.structure
    numbering, forest = structure.numbering, structure.forest
    n, bags = numbering.order.size, forest.bag_kind.size
    alone = np.flatnonzero(numbering.core < 0)
    core_of_bag = np.repeat(np.arange(forest.core_top.size), np.diff(forest.core_bag))
    turn = np.concatenate((alone, forest.core_top[core_of_bag]))
    point = np.concatenate((alone, -1 - np.arange(bags)))
    order = np.argsort(turn, kind="stable")
    point = point[order]
    at = np.arange(point.size, dtype=np.int32)
    place_point = np.full(n, -1, np.int32)
    place_point[point[point >= 0]] = at[point >= 0]
    bag_point = np.empty(bags, np.int32)
    bag_point[-1 - point[point < 0]] = at[point < 0]
    place = np.empty(n, np.int32)
    place[numbering.order] = np.arange(n, dtype=np.int32)
    inside = forest.slot_place[forest.bag_slot]
    holder = np.repeat(np.arange(bags, dtype=np.int32), np.diff(forest.bag_ptr))
    held = holder[np.argsort(inside, kind="stable")]
    held_ptr = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.bincount(inside, minlength=n))))
    return deviate.Points(point, place_point, bag_point, graph.ptr, graph.adj, place, held_ptr, held)
