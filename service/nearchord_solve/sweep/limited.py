"""The heaviest independent set of at most so many vertices, by dynamic programming over all bags.

*Recurrence.*  For a bag B and an independent part t of its adhesion let F_B(t, c) be the most that at most c vertices
can add to t below, where the vertices below are the homes of B and of the bags under it.  Then

    F_B(t, c) = max over independent sets s of G in B with adhesion part t, h homes and home weight w:
                w + max over c_1 + .. + c_k <= c - h of the sum of F_C(s & adhesion of C, c_C) over the bags C below B.

*Proof.*  Every vertex has one home, so that an independent set I is counted once, where it is at home.  I & B is an
independent set s of G[B]; what I has under different bags below B is not adjacent (it lies on different sides of B)
and depends on s only through the adhesions, so that it can be chosen apart for each, given how many vertices each may
use. F grows with c and does not change from the number of homes below on, so vectors end there: merging bags with a
and b homes costs a b steps for a state, n * limit for a state in all.  F is not concave in c: a star with weights 3
in the centre and 2 at three leaves has 0, 3, 4, 6.
"""

from dataclasses import dataclass, field

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.sweep.labelled import Line

State = tuple[int, ...]

NEVER = -(2**62)
"""Less than any sum of weights, with room to add one."""


class OverBudget(Exception):
    """More states, each with each number of vertices, than allowed."""


@dataclass(frozen=True, eq=False)
class Message:
    """What a bag sends: F int64[rows, caps] by part of the adhesion and limit, and the state that reaches it."""

    adhesion: frozenset[int]
    row: dict[State, int]
    value: I64
    pick: I32
    states: list[State]


@dataclass(eq=False)
class LimitedSweep:
    """One run over the bags of ``line``; ``weights`` int64[n] by vertex, not negative.

    ``most``: entries of all F together, above which it gives up with OverBudget.
    """

    line: Line
    weights: I64
    limit: int
    most: int
    monitor: Monitor
    _message: list[Message | None] = field(default_factory=list)
    _below: list[list[int]] = field(default_factory=list)
    _entries: int = 0

    def run(self) -> tuple[int, U8] | None:
        """(optimum, its set uint8[n] by vertex); None if stopped."""
        forest = self.line.forest
        bags = forest.bag_kind.size
        self.monitor.enter(Phase.SWEEP, 2 * bags)
        self._message = [None] * bags
        self._below = [[] for _ in range(bags)]
        roots: list[int] = []
        for b, above in enumerate(forest.bag_above.tolist()):
            (self._below[above] if above >= 0 else roots).append(b)
        self._budget_at_least()
        for b in range(bags - 1, -1, -1):
            if self._stopped(bags - b):
                return None
            self._message[b] = self._settle(b)
        return self._outward(roots)

    def _stopped(self, step: int) -> bool:
        self.monitor.cells[Monitor.STEP] = step
        return bool(self.monitor.stop)

    def _budget_at_least(self) -> None:
        """Give up before the first step if bags without fill, and what is merged at each bag, are too much already."""
        forest = self.line.forest
        homes = (np.diff(forest.bag_ptr) - forest.bag_adhesion).tolist()
        caps = [0] * (len(homes) + 1)  # the last is above the roots, which have -1 above them
        total = 0
        for b in range(len(homes) - 1, -1, -1):
            plain = not forest.bag_kind[b]
            caps[b] = min(self.limit, caps[b] + (min(1, homes[b]) if plain else homes[b]))
            if plain:
                total += (int(forest.bag_adhesion[b]) + 1) * (caps[b] + 1)
            above = int(forest.bag_above[b])
            caps[above] = caps[above] + caps[b]
            total += min(self.limit, caps[above]) + 1
        if total > self.most:
            raise OverBudget

    def _members(self, b: int) -> tuple[list[int], int]:
        forest = self.line.forest
        begin, end = int(forest.bag_ptr[b]), int(forest.bag_ptr[b + 1])
        return forest.bag_slot[begin:end].tolist(), int(forest.bag_adhesion[b])

    def _states(self, members: list[int]) -> list[State]:
        """Independent sets of G in a bag: cliques of its fill graph, the empty one first, then by size."""
        forest = self.line.forest
        inside = set(members)
        higher: dict[int, set[int]] = {v: set() for v in members}
        for v in members:
            for u in forest.slot_fill[forest.slot_fill_ptr[v] : forest.slot_fill_ptr[v + 1]].tolist():
                if u in inside:
                    higher[u].add(v)
        states: list[State] = [(), *((v,) for v in members)]
        grown: list[tuple[State, set[int]]] = [((v,), higher[v]) for v in members if higher[v]]
        while grown:
            grown = [((*s, v), others & higher[v]) for s, others in grown for v in sorted(others)]
            states += [s for s, _ in grown]
            if len(states) > self.most:
                raise OverBudget
        return states

    def _settle(self, b: int) -> Message:
        members, adhesion = self._members(b)
        states = self._states(members)
        value = np.zeros((len(states), 1), np.int64)
        for c in self._below[b]:
            message = self._of(c)
            value = _merged(value, message.value[_rows(states, message)], self.limit)
        kept = frozenset(members[:adhesion])
        parts = [tuple(v for v in s if v in kept) for s in states]
        homes = np.array([len(s) - len(t) for s, t in zip(states, parts, strict=True)], np.int64)
        weight = self.weights[self.line.order]
        worth = np.array(
            [sum(weight[list(s[len(t) :])].tolist()) for s, t in zip(states, parts, strict=True)], np.int64
        )
        full = _with_homes(value, homes, worth, self.limit)
        row = {s: i for i, s in enumerate(s for s, t in zip(states, parts, strict=True) if s == t)}
        message = _best_rows(full, states, np.array([row[t] for t in parts]), row, kept)
        self._entries += message.value.size
        if self._entries > self.most:
            raise OverBudget
        return message

    def _of(self, b: int) -> Message:
        message = self._message[b]
        assert message is not None
        return message

    def _outward(self, roots: list[int]) -> tuple[int, U8] | None:
        chosen = np.zeros(self.weights.size, np.uint8)
        best, shares = self._split((), roots, self.limit)
        ready = [(b, (), c) for b, c in zip(roots, shares, strict=True)]
        done = 0
        while ready:
            b, part, c = ready.pop()
            done += 1
            if self._stopped(len(self._message) + done):
                return None
            message = self._of(b)
            state = message.states[message.pick[message.row[part], min(c, message.value.shape[1] - 1)]]
            homes = state[len(part) :]
            chosen[self.line.order[list(homes)]] = 1
            _, shares = self._split(state, self._below[b], c - len(homes))
            for child, share in zip(self._below[b], shares, strict=True):
                adhesion = self._of(child).adhesion
                ready.append((child, tuple(v for v in state if v in adhesion), share))
        return best, chosen

    def _split(self, state: State, bags: list[int], limit: int) -> tuple[int, list[int]]:
        """The most that these bags add to a state within a limit, and how many vertices each may use for it."""
        rows = [self._of(b).value[_rows([state], self._of(b))] for b in bags]
        sums = [np.zeros((1, 1), np.int64)]
        for row in rows:
            sums.append(_merged(sums[-1], row, limit))
        shares: list[int] = []
        left = min(limit, sums[-1].shape[1] - 1)
        best = int(sums[-1][0, left])
        for before, row in zip(sums[-2::-1], rows[::-1], strict=True):
            for share in range(min(left, row.shape[1] - 1) + 1):
                rest = min(left - share, before.shape[1] - 1)
                if before[0, rest] + row[0, share] == sums[len(rows) - len(shares)][0, left]:
                    break
            shares.append(share)
            left = rest
        return best, shares[::-1]


def _rows(states: list[State], message: Message) -> I64:
    """The row of each state's part in the adhesion of a message."""
    adhesion, row = message.adhesion, message.row
    return np.array([row[tuple(v for v in s if v in adhesion)] for s in states], np.int64)


def _merged(one: I64, other: I64, limit: int) -> I64:
    """Best sums of two functions of a limit, row by row: int64[rows, ..]."""
    if one.shape[1] < other.shape[1]:
        one, other = other, one
    width = min(limit, one.shape[1] + other.shape[1] - 2) + 1
    merged = np.empty((one.shape[0], width), np.int64)
    flat = one.shape[1]
    merged[:, :flat] = one[:, :width] + other[:, :1]
    merged[:, flat:] = merged[:, flat - 1 : flat]
    for share in range(1, min(other.shape[1], width)):
        upto = min(width, share + flat)
        np.maximum(
            merged[:, share:upto], one[:, : upto - share] + other[:, share : share + 1], out=merged[:, share:upto]
        )
        if upto < width:
            np.maximum(merged[:, upto:], merged[:, upto - 1 : upto], out=merged[:, upto:])
    return merged


def _with_homes(value: I64, homes: I64, worth: I64, limit: int) -> I64:
    """Add the homes of each state, which use some of the limit."""
    most = int(homes.max(initial=0))
    width = min(limit, value.shape[1] - 1 + most) + 1
    full = np.full((value.shape[0], width), NEVER, np.int64)
    for count in range(min(most, width - 1) + 1):
        rows = np.flatnonzero(homes == count)
        upto = min(width, count + value.shape[1])
        full[rows, count:upto] = value[rows, : upto - count] + worth[rows, None]
        full[rows, upto:] = full[rows, upto - 1 : upto]
    return full


def _best_rows(full: I64, states: list[State], part: I64, row: dict[State, int], adhesion: frozenset[int]) -> Message:
    """For each part of the adhesion the best state, at each limit; ties to the first."""
    order = np.argsort(part, kind="stable")
    begin = np.searchsorted(part[order], np.arange(len(row)))
    value = np.maximum.reduceat(full[order], begin)
    first = np.where(full == value[part], np.arange(len(states), dtype=np.int32)[:, None], len(states))
    return Message(adhesion, row, value, np.minimum.reduceat(first[order], begin).astype(np.int32), states)
