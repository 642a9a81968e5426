"""Bounds and choices under a limit from sweeps without one, in which each vertex pays a penalty.

Let f(c) be the heaviest weight of an independent set of at most c vertices, and C the limit.

*Bound.*  For every penalty y >= 0, f(C) <= y C + max over independent sets S of w(S) - y |S|: a set of at most C
vertices pays at most y C.  With y = p/q the maximum is found by a sweep over the whole numbers q w - p.

*Search.*  The points (|S|, w(S)) of the sets that sweeps find lie on the upper hull of f.  Begin with the empty set
and the heaviest one, which is too large.  The penalty at which two points, one on each side of C, are worth the same
is the slope between them: a sweep either finds nothing better, then both sets and the hull between them are optimal
for it and no penalty gives a smaller bound; or a set strictly between them in size, because both are on the hull, and
it takes the place of the one on its side.

*Exchange.*  Let S and T both be optimal for a penalty.  The connected components of G on the vertices in just one of
them may be exchanged one by one: no edge leaves a component to the other set, so what results is independent.  All
exchanges together change nothing of the penalised weight, and none of them can be a gain on S, nor, taken back, on T:
so each is worth nothing. Any choice of exchanges then is optimal for the penalty, and one that gives exactly C
vertices has weight f(C), as it meets the bound.  Which sizes can be had is a question of sums of whole numbers.
"""

from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from nearchord_solve.arrays import I64, U8
from nearchord_solve.graph import Graph
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.structure import Structure
from nearchord_solve.sweep import sweep

MOST_SWEEPS = 60
MOST_SUM = 2**62  # of the absolute values that a sweep works on


@dataclass(frozen=True, eq=False)
class Corner:
    """An independent set, uint8[n], with its size and weight."""

    size: int
    weight: int
    chosen: U8


def corner(task: Task, chosen: U8) -> Corner:
    """The corner of a set."""
    return Corner(int((chosen != 0).sum()), task.weight(chosen), chosen)


@dataclass(eq=False)
class Penalised:
    """The search on one graph: ``below`` has at most ``limit`` vertices, ``above`` more; ``bound`` is valid.

    ``fits`` uint8[C]: cores that the sweeps settle by tables; with all of them the sweeps are exact.
    """

    task: Task
    structure: Structure
    fits: U8
    limit: int
    below: Corner
    above: Corner
    bound: int
    sweeps: int = 0

    def search(self) -> None:
        """Close in on the limit; afterwards ``below`` is the best set known."""
        while self.sweeps < MOST_SWEEPS and self.below.weight < self.bound and not self.task.stop:
            slope = Fraction(self.above.weight - self.below.weight, self.above.size - self.below.size)
            if not self._sweep(slope):
                return

    def _sweep(self, slope: Fraction) -> bool:
        """Sweep with a penalty; False if that brought nothing new but, perhaps, an exchange."""
        penalty, scale = self._whole(slope)
        with self.task.gauge.monitor.aside() as quiet:
            swept = sweep(self.structure, self.task.weights * scale - penalty, self.fits, quiet)
        self.sweeps += 1
        if swept is None:
            return False
        self.bound = min(self.bound, (swept.bound + penalty * self.limit) // scale)
        self.task.gauge.bound(self.bound)
        if swept.chosen is None:
            return False
        found = corner(self.task, swept.chosen)
        worth = scale * self.below.weight - penalty * self.below.size
        if swept.bound == worth == scale * self.above.weight - penalty * self.above.size:
            self._take(exchanged(self.task, self.below, self.above, self.limit))
            return False
        return self._take(found)

    def _take(self, found: Corner) -> bool:
        """Let a set of a size between the two take the place of one; False if it is not between them."""
        if not self.below.size < found.size < self.above.size:
            return False
        if found.size <= self.limit:
            self.below = found
            self.task.gauge.incumbent(found.weight)
        else:
            self.above = found
        return True

    def _whole(self, slope: Fraction) -> tuple[int, int]:
        """The penalty as p/q, so that sums of q w - p stay small enough; rounded down if they would not."""
        n = self.task.graph.n
        total = int(self.task.weights.sum())
        if slope.denominator * total + n * slope.numerator < MOST_SUM:
            return slope.numerator, slope.denominator
        return min(int(slope), (MOST_SUM - total) // max(1, n)), 1


def exchanged(task: Task, below: Corner, above: Corner, limit: int) -> Corner:
    """The best set of at most ``limit`` vertices by exchanges between two sets optimal for the same penalty.

    Either the largest that exchanges lead to within the limit, or the smallest beyond it without its lightest vertices.
    """
    pieces = differences(task.graph, below.chosen != above.chosen)
    least = below.chosen.copy()
    gains = []
    for piece in pieces:
        gain = int(above.chosen[piece].sum()) - int(below.chosen[piece].sum())
        if gain < 0:
            least[piece] ^= 1  # now taking it back is a gain
        gains.append(abs(gain))
    room = limit - int(least.sum())
    within, beyond = least.copy(), least.copy()
    for i in reachable(gains, room):
        within[pieces[i]] ^= 1
    for i in set(range(len(pieces))) - set(reachable(gains, sum(gains) - room)):
        beyond[pieces[i]] ^= 1
    return max(corner(task, within), heaviest_of(task, beyond, limit), key=lambda found: found.weight)


def heaviest_of(task: Task, chosen: U8, limit: int) -> Corner:
    """The heaviest vertices of a set, ties to the lowest, and nothing else."""
    inside = np.flatnonzero(chosen)
    kept = inside[np.argsort(-task.weights[inside], kind="stable")[:limit]]
    few = np.zeros(task.graph.n, np.uint8)
    few[kept] = 1
    return corner(task, few)


def differences(graph: Graph, differs: I64) -> list[I64]:
    """Connected components of the graph on the vertices that differ, bool[n]."""
    pieces = []
    left = np.asarray(differs).copy()
    for v in np.flatnonzero(left).tolist():
        if not left[v]:
            continue
        left[v] = False
        piece = [v]
        for u in piece:
            row = graph.adj[graph.ptr[u] : graph.ptr[u + 1]]
            more = row[left[row]]
            left[more] = False
            piece.extend(more.tolist())
        pieces.append(np.array(piece, np.int64))
    return pieces


def reachable(gains: list[int], room: int) -> list[int]:
    """Numbers of gains (not negative) whose sum is as large as possible within ``room``.

    Gains of the same size are taken in bundles of 1, 2, 4, ..; a number's bits say which sums the bundles so far
    reach.  O(distinct sizes * log * room / 64) words.
    """
    of_size: dict[int, list[int]] = {}
    for i, gain in enumerate(gains):
        if gain:
            of_size.setdefault(gain, []).append(i)
    mask = (1 << (room + 1)) - 1
    sums = [1]
    bundles: list[list[int]] = []
    for gain, members in sorted(of_size.items()):
        step = 1
        while members:
            bundles.append(members[:step])
            members = members[step:]
            sums.append((sums[-1] | sums[-1] << gain * len(bundles[-1])) & mask)
            step *= 2
    left = sums[-1].bit_length() - 1
    taken: list[int] = []
    for before, bundle in zip(sums[-2::-1], bundles[::-1], strict=True):
        if not before >> left & 1:
            taken += bundle
            left -= gains[bundle[0]] * len(bundle)
    return taken
