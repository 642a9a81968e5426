"""Whether vertices that must be chosen can be chosen together: colours for them, or few of them that cannot.

A set that can be chosen stays one when vertices leave it, so some choice holds all vertices of a set if and only if the
graph on that set has the property itself: no other vertex matters.
"""

from collections import deque
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U8
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.greedy_classes import colour_in_order, grow_forest
from nearchord_solve.monitor import Monitor
from nearchord_solve.order import Unfinished, rank
from nearchord_solve.questions.frame import run_program
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Task
from nearchord_solve.questions.label_program import LabelledProgram
from nearchord_solve.questions.pins import keep_vertices

LISTED = 20  # vertices of a conflict that are written out


@dataclass(frozen=True, eq=False)
class Conflict:
    """Vertices that cannot be chosen together, though any of them can be left out to make it so; int64, ascending."""

    vertices: I64

    def reason(self, colours: int) -> str:
        """In words; ``colours`` 0 means forests."""
        names = [str(v) for v in self.vertices.tolist()]
        if len(names) > LISTED:
            listed = f"{', '.join(names[:LISTED])}, ... ({len(names)} in all)"
        else:
            listed = f"{', '.join(names[:-1])} and {names[-1]}"
        what = f"need more than {colours} colours" if colours > 1 else "are adjacent" if colours else "close a cycle"
        return f"the pins contradict each other: vertices {listed} must be chosen, but {what}"


def choose_together(
    graph: Graph, must: I64, colours: int, budget: Budget, monitor: Monitor
) -> U8 | Conflict | None:  # fmt: skip
    """Colours uint8[n] of the vertices of ``must`` (0 elsewhere; for forests 1), or a conflict among them.

    None if that could not be settled within the budget, which happens with three or more colours only.  O(n) without
    pins, O(n + m) with fewer colours; with more one sweep over the graph on ``must``, and as many again as a conflict
    has vertices, times the logarithm of ``must.size``.
    """
    if not must.size:
        return np.zeros(graph.n, np.uint8)
    within = _within(graph, must)
    with monitor.aside() as quiet:
        found = _settle(within, colours, budget, quiet)
    if isinstance(found, Conflict):
        return Conflict(np.sort(must[found.vertices]))
    if found is None:
        return None
    colour = np.zeros(graph.n, np.uint8)
    colour[must] = found
    return colour


def _within(graph: Graph, vertices: I64) -> Graph:
    """The graph on ``vertices``, ascending."""
    stays = np.zeros(graph.n, bool)
    stays[vertices] = True
    return keep_vertices(graph, np.zeros(graph.n, np.int64), stays, np.empty(0, np.int64)).graph


def _settle(graph: Graph, colours: int, budget: Budget, monitor: Monitor) -> U8 | Conflict | None:
    """As :func:`choose_together` when all vertices must be chosen."""
    colour = np.zeros(graph.n, np.uint8)
    if colours == 0:
        sequence = np.arange(graph.n)
        grow_forest(graph.ptr, graph.adj, sequence, colour)
    else:
        ranking = rank(graph, monitor)
        if isinstance(ranking, Unfinished):
            return None
        sequence = ranking.order.astype(np.int64)
        colour_in_order(graph.ptr, graph.adj, sequence, colours, colour)
    left = colour[sequence] == 0
    if not left.any():
        return colour
    at = int(np.argmax(left))
    before = np.zeros(graph.n, bool)
    before[sequence[:at]] = True
    v = int(sequence[at])
    if colours == 1:
        row = graph.adj[graph.ptr[v] : graph.ptr[v + 1]]
        return Conflict(np.array([v, row[before[row]][0]], np.int64))
    if colours <= 2:
        return Conflict(_short_cycle(graph, v, before, colour if colours else None))
    return _clique_with(graph, v, before, colours) or _search(graph, sequence, colours, budget, monitor)


def _short_cycle(graph: Graph, v: int, before: np.ndarray, colour: U8 | None) -> I64:
    """A chordless cycle through v and otherwise vertices ``before`` it, an odd one if these are coloured.

    Without colours they make a forest in which two neighbours of v are connected: a path between two neighbours that
    meets no third one has no chord and none to v.  With two colours some neighbour of the first is connected to one of
    the second: a shortest such path has no chord, meets no other neighbour of v, and has an even number of vertices.
    One search from all neighbours (of the first colour) at once finds it, as it goes on from each vertex once.
    """
    row = [u for u in graph.adj[graph.ptr[v] : graph.ptr[v + 1]].tolist() if before[u]]
    starts = [u for u in row if colour is None or colour[u] == 1]
    ends = set(row) - set(starts)
    origin = {u: u for u in starts}
    back = dict.fromkeys(starts, -1)
    queue = deque(starts)
    while True:
        u = queue.popleft()
        for x in graph.adj[graph.ptr[u] : graph.ptr[u + 1]].tolist():
            if not before[x] or x == back[u]:
                continue
            if x in ends:
                return np.array([v, x, *_path(back, u)], np.int64)
            if x not in back:
                origin[x], back[x] = origin[u], u
                queue.append(x)
            elif colour is None and origin[x] != origin[u]:
                return np.array([v, *_path(back, x), *_path(back, u)], np.int64)


def _path(back: dict[int, int], u: int) -> list[int]:
    path = []
    while u >= 0:
        path.append(u)
        u = back[u]
    return path


def _clique_with(graph: Graph, v: int, before: np.ndarray, colours: int) -> Conflict | None:
    """v and ``colours`` neighbours before it, if they make a clique; on chordal graphs all of them do."""
    row = graph.adj[graph.ptr[v] : graph.ptr[v + 1]]
    members = row[before[row]][:colours].astype(np.int64)
    for u in members:
        others = members[members != u]
        if not np.isin(others, graph.adj[graph.ptr[u] : graph.ptr[u + 1]]).all():
            return None
    return Conflict(np.append(members, v))


def _search(
    graph: Graph, sequence: I64, colours: int, budget: Budget, monitor: Monitor
) -> U8 | Conflict | None:  # fmt: skip
    """Colours by a sweep, or a conflict: the shortest prefixes of what is left that still conflict with what is kept.

    The last vertex of such a prefix is needed, and no vertex behind it is.
    """

    def colour_of(vertices: I64) -> U8 | None:
        """Colours of some vertices; uint8[0] if there are none."""
        whole = np.sort(vertices)
        part = _within(graph, whole)
        task = Task(part, np.ones(part.n, np.int64), replace(budget, fill=None), "bound", Gauge(monitor, 0, 1))
        ended = run_program(task, LabelledProgram(colours))
        colour = None if ended.settled is None else ended.settled.colour
        if ended.found.bound is None or ended.found.value != ended.found.bound or colour is None:
            return None
        return colour.astype(np.uint8) if ended.found.value == part.n else np.empty(0, np.uint8)

    found = colour_of(sequence)
    if found is None or found.size:
        return found
    return _shrink(sequence, colour_of)


def _shrink(left: I64, colour_of: Callable[[I64], U8 | None]) -> Conflict | None:
    kept = np.empty(0, np.int64)
    while True:
        low, high = 0, left.size  # with kept, the first `high` conflict; the first `low - 1` do not
        while low < high:
            middle = (low + high) // 2
            found = colour_of(np.concatenate((kept, left[:middle]))) if kept.size + middle else np.ones(1, np.uint8)
            if found is None:
                return None
            low, high = (middle + 1, high) if found.size else (low, middle)
        if high == 0:
            return Conflict(kept)
        kept, left = np.append(kept, left[high - 1]), left[: high - 1]
