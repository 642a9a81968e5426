"""The passes over all bags for colour classes and forests: inward to collect, outward to choose and to believe.

Vertices are numbered by rank in a perfect elimination order of G + fill, highest first to go; ``later`` row r is L(r),
ascending.  With two colours, and for forests, bags without fill are settled by a formula (:mod:`.label_closed`), and
bags with fill keep a table only for what worths of vertices and pairs do not say (:mod:`.label_bags`).  Otherwise
there is a best value for each state of each adhesion, in the table or, for colours on adhesions without fill, in the
order of the sets (:mod:`.label_sets`); states that leave out a vertex that must be chosen are not entered, so whatever
has no value is impossible.
"""

from typing import NamedTuple

import numpy as np

from nearchord_solve.kernels.cells import BAGS_DONE, STEP, STOP
from nearchord_solve.kernels.compiled import I32, I64, U8, U64, kernel
from nearchord_solve.kernels.layout import ADHESION_FILL, BAG_FILL, Forest
from nearchord_solve.kernels.words import full
from nearchord_solve.sweep.kernels.label_bags import Bag, collect_few, open_bag, relate_entries, send_few
from nearchord_solve.sweep.kernels.label_belief import look_outside, restore_worths, tell_few
from nearchord_solve.sweep.kernels.label_choice import apply_best, start_choice
from nearchord_solve.sweep.kernels.label_closed import choose_closed, settle_closed
from nearchord_solve.sweep.kernels.label_goals import BELIEVE, CHOOSE, COLLECT, MEASURE, Belief, Goal, no_best
from nearchord_solve.sweep.kernels.label_sets import visit_sets
from nearchord_solve.sweep.kernels.label_states import visit_states
from nearchord_solve.sweep.kernels.label_table import Sets, Table, count_sets, find, table_bytes

DONE, STOPPED, STATES, MEMORY, IMPOSSIBLE = 0, 1, 2, 3, 4


class Plan(NamedTuple):
    """What all passes share.  Vertices are ranks."""

    forest: Forest
    later_ptr: I64  # [n+1]
    later: I32
    single: I64  # [n] weights; then what each vertex is worth when it is eliminated
    pair: I64  # along later, zeros at first; then what pairs are worth; empty unless plain states are kept as worths
    must: U8  # [n] what has to be chosen; not looked at where plain states are kept as worths
    child_ptr: I64  # [B+1] bags below each bag: those that send entries, or all when believing
    child: I64
    sets: Sets
    entries: I64  # [B, 2] where the entries of each bag begin and end
    colour: U8  # [n] zeros at first; then colours of what is chosen (for forests anything but 0)
    pick: I32  # [B] the entry chosen of each bag, -1 for plain ones


@kernel
def link_tables(forest: Forest, closed: bool) -> tuple[I64, I64]:
    """Bags below each bag that send entries: (ptr int64[B+1], bag int64[..]), ascending."""
    bags = forest.bag_kind.shape[0]
    ptr = np.zeros(bags + 1, np.int64)
    for b in range(bags):
        if forest.bag_above[b] >= 0 and (not closed or forest.bag_kind[b] & ADHESION_FILL):
            ptr[forest.bag_above[b] + 1] += 1
    for b in range(bags):
        ptr[b + 1] += ptr[b]
    child = np.empty(ptr[bags], np.int64)
    write = ptr.copy()
    for b in range(bags):
        if forest.bag_above[b] >= 0 and (not closed or forest.bag_kind[b] & ADHESION_FILL):
            child[write[forest.bag_above[b]]] = b
            write[forest.bag_above[b]] += 1
    return ptr, child


@kernel
def _start(mode: int, bag: Bag, table: Table, colours: int, plan: Plan, belief: Belief) -> tuple[Goal, U64]:
    """What to do first with the states of a bag, and the vertices that may be in them."""
    if mode == CHOOSE:
        best, candidates = start_choice(bag, table, colours, plan.colour, plan.pick[bag.number])
        return Goal(mode, np.empty((0, 0), np.int64), best, belief), candidates
    everything = full(bag.member.shape[0], bag.near.shape[1])
    few = collect_few(bag) if bag.closed else np.empty((0, 0), np.int64)
    first = mode
    if mode == BELIEVE and bag.closed:
        first = MEASURE
    elif mode == BELIEVE:
        look_outside(bag, table, plan.entries[bag.number, 0], plan.entries[bag.number, 1], few, belief)
    return Goal(first, few, no_best(), belief), everything


@kernel
def _send(bag: Bag, table: Table, few: I64, plan: Plan, where: I32) -> int:
    """Enter what a bag collected; returns what it adds to the base, -1 if nothing was possible."""
    plan.entries[bag.number, 1] = table.used[0]
    if bag.closed:
        relate_entries(bag, table, plan.entries[bag.number, 0], few, where)
        return send_few(bag, few, plan.later_ptr, plan.later, plan.single, plan.pair)
    if plan.forest.bag_above[bag.number] >= 0:
        return 0
    if bag.first >= 0:
        return int(table.sets[bag.first])
    root = find(table, bag.number, bag.member, int(np.int64(0)))
    return int(table.value[root]) if root >= 0 else -1


@kernel
def _believe_closed(bag: Bag, table: Table, belief: Belief) -> None:
    """Believe in a bag without fill where plain states are kept as worths: it has no others."""
    restore_worths(bag)
    few = collect_few(bag)
    look_outside(bag, table, belief.few_ptr[0], belief.few_ptr[0], few, belief)
    tell_few(bag, few, belief)


@kernel
def _sets_outside(b: int, plan: Plan, table: Table, belief: Belief) -> None:
    """Turn the totals told to the sets of an adhesion without fill into what lies outside."""
    first = plan.sets.first[b]
    for e in range(first, first + count_sets(plan.forest.bag_adhesion[b], plan.sets.choose)):
        belief.sets[e] -= table.sets[e]


@kernel
def pass_bags(
    mode: int, plan: Plan, colours: int, closed: bool, table: Table, belief: Belief, most: int, most_bytes: int,
    cells: I64,
) -> tuple[int, int, int, Table]:  # fmt: skip
    """COLLECT from the last bag to the first, then CHOOSE or BELIEVE from the first to the last.

    ``colours`` 0 means forests; ``closed``: plain states are kept as worths.  To BELIEVE, the best total must have been
    told to the roots.  Returns (DONE, STOPPED, STATES if more than ``most`` were met, MEMORY if the table outgrew
    ``most_bytes`` or IMPOSSIBLE, value, states, table).
    """
    forest = plan.forest
    bags = forest.bag_kind.shape[0]
    where = np.full(forest.slot_place.shape[0], -1, np.int32)
    base = int(np.int64(0))
    states = int(np.int64(0))
    for step in range(bags):
        b = bags - 1 - step if mode == COLLECT else step
        if (step & 1023) == 0:
            cells[STEP] = step * forest.slot_place.shape[0] // bags
            cells[BAGS_DONE] = step
        if (step & 1023) == 0 and cells[STOP] != 0:
            return STOPPED, base, states, table
        plain = closed and not forest.bag_kind[b] & BAG_FILL
        if plain and mode == COLLECT:
            base += settle_closed(b, forest, plan.later_ptr, plan.later, plan.single, plan.pair)
            continue
        if plain and mode == CHOOSE:
            choose_closed(b, forest, plan.later_ptr, plan.single, plan.pair, plan.colour)
            continue
        child = plan.child[plan.child_ptr[b] : plan.child_ptr[b + 1]]
        if mode == BELIEVE and plan.sets.first[b] >= 0:
            _sets_outside(b, plan, table, belief)
        if plan.sets.first[b] >= 0 and not forest.bag_kind[b] & BAG_FILL:
            states += count_sets(forest.bag_ptr[b + 1] - forest.bag_ptr[b], plan.sets.choose)
            if states > most:
                return STATES, base, states, table
            visit_sets(
                mode, b, forest, child, plan.sets, plan.single, plan.must, table.sets, belief, plan.colour, where, cells
            )
            if cells[STOP] != 0:
                return STOPPED, base, states, table
            if mode == COLLECT and forest.bag_above[b] < 0:
                if table.sets[plan.sets.first[b]] < 0:
                    return IMPOSSIBLE, base, states, table
                base += table.sets[plan.sets.first[b]]
            continue
        bag = open_bag(
            b, forest, plan.later_ptr, plan.single, plan.pair, plan.must, closed, child, table, plan.sets, where
        )
        if plain:
            _believe_closed(bag, table, belief)
            continue
        if mode == COLLECT:
            plan.entries[b, 0] = table.used[0]
        goal, candidates = _start(mode, bag, table, colours, plan, belief)
        while True:
            table, more = visit_states(bag, table, colours, candidates, most - states, goal, cells)
            if goal.mode != MEASURE:
                break
            look_outside(bag, table, plan.entries[b, 0], plan.entries[b, 1], goal.few, belief)
            tell_few(bag, goal.few, belief)
            goal = Goal(mode, goal.few, goal.best, belief)
        if cells[STOP] != 0:
            return STOPPED, base, states, table
        if mode == CHOOSE:
            apply_best(bag, goal.best, colours > 0, plan.colour, plan.pick)
        if mode != COLLECT:
            continue
        size = bag.member.shape[0]
        states += more + 1 + size + size * (size - 1) // 2 if closed else more
        if states > most:
            return STATES, base, states, table
        if table_bytes(table) > most_bytes:
            return MEMORY, base, states, table
        sent = _send(bag, table, goal.few, plan, where)
        if not closed and sent < 0:
            return IMPOSSIBLE, base, states, table
        base += sent
    return DONE, base, states, table
