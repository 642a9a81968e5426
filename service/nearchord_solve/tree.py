"""From a graph to its structure: number it, find its cores, triangulate them."""

from dataclasses import dataclass, replace

from nearchord_solve.arrays import I32
from nearchord_solve.budget import Budget
from nearchord_solve.fill import Cores, find_cores, triangulate
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Kept, Reuse
from nearchord_solve.kernels.layout import Numbering
from nearchord_solve.memory import most_fill, predicted_bytes, quotient_bytes
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import Ranking, Unfinished, eliminate, rank, rank_by_degree
from nearchord_solve.structure import Structure


@dataclass(frozen=True, eq=False)
class Partial:
    """What there is of a structure that could not be finished, and why."""

    why: Unfinished
    ranking: Ranking | None

    @property
    def reason(self) -> str:
        """Why, in words."""
        if self.why is Unfinished.TOO_LARGE:
            return "memory budget: the fill of the graph is too large to hold"
        return f"seconds ran out while {'ordering' if self.ranking is None else 'triangulating'} the graph"


def build_structure(graph: Graph, budget: Budget, monitor: Monitor, reuse: Reuse | None = None) -> Structure | Partial:
    """Number the graph, find its cores and triangulate them; records fill, bags and states in the monitor.

    If the fill exceeds the fill budget, the cores are triangulated again for least fill, and that is taken
    if it meets the budget.  ``reuse``: a structure kept from an earlier solve is taken if it serves, a new one is
    left there.
    """
    known = reuse.serving(budget) if reuse is not None else None
    if known is not None:
        monitor.enter(Phase.TREE)
        _show(known, monitor)
        return known
    built = _new_structure(graph, budget, monitor)
    if reuse is not None and isinstance(built, Structure):
        reuse.made = Kept(graph.n, graph.m, budget, built)
    return built


def _new_structure(graph: Graph, budget: Budget, monitor: Monitor) -> Structure | Partial:
    ranking = rank(graph, monitor)
    if isinstance(ranking, Unfinished):
        return Partial(ranking, None)
    built = _build(graph, ranking, budget, monitor)
    return Partial(built, ranking) if isinstance(built, Unfinished) else built


def _build(graph: Graph, ranking: Ranking, budget: Budget, monitor: Monitor) -> Structure | Unfinished:
    """Structure of the better of two numberings; the second is tried only if the first is costly and coarse."""
    most = most_fill(graph.n, graph.m, budget.memory)
    first = _structured(ranking, most, budget, monitor)
    if first is Unfinished.STOPPED or (isinstance(first, Structure) and not first.coarse(budget)):
        return first
    if isinstance(first, Structure):
        first = replace(first, plain=False)
    if budget.memory - predicted_bytes(graph.n, graph.m) < quotient_bytes(graph.n, graph.m):
        return first
    other = rank_by_degree(graph, graph.m + most, monitor)
    if isinstance(other, Ranking):
        second = _structured(other, most, budget, monitor)
        if isinstance(second, Structure) and (
            isinstance(first, Unfinished) or (second.states, second.fill) < (first.states, first.fill)
        ):
            return replace(second, plain=False)
    return Unfinished.STOPPED if monitor.stop else first


def _structured(ranking: Ranking, most: int, budget: Budget, monitor: Monitor) -> Structure | Unfinished:
    numbering = eliminate(ranking, most, monitor)
    if isinstance(numbering, Unfinished):
        return numbering
    monitor.enter(Phase.TREE, ranking.order.size)
    cores = find_cores(numbering, monitor)
    if isinstance(cores, Unfinished):
        return cores
    structure = _triangulated(numbering, cores, budget, monitor)
    if isinstance(structure, Unfinished):
        return structure
    if budget.fill is None or structure.fill <= budget.fill:
        return replace(structure, plain=True)
    other = _triangulated(numbering, cores, budget, monitor, least_fill=True)
    return other if isinstance(other, Unfinished) or other.fill <= budget.fill else structure


def with_fill(
    structure: Structure, known: I32, proven: int, budget: Budget, monitor: Monitor
) -> Structure | Unfinished:
    """The same numbering and cores with another minimal fill, int32[k, 2] pairs of vertices.

    ``proven``: a lower bound of the fill.  Cores too large for an exact search keep theirs.
    """
    other = _triangulated(structure.numbering, structure.cores, budget, monitor, known=known)
    return other if isinstance(other, Unfinished) else replace(other, proven=proven)


def _triangulated(
    numbering: Numbering, cores: Cores, budget: Budget, monitor: Monitor, *,
    least_fill: bool = False, known: I32 | None = None,
) -> Structure | Unfinished:  # fmt: skip
    monitor.enter(Phase.TREE, cores.ptr.size - 1)
    forest = triangulate(numbering, cores, budget.states, least_fill, monitor, known)
    if isinstance(forest, Unfinished):
        return forest
    structure = Structure(numbering, cores, forest)
    _show(structure, monitor)
    return structure


def _show(structure: Structure, monitor: Monitor) -> None:
    cells = monitor.cells
    cells[Monitor.FILL] = structure.fill
    cells[Monitor.FILL_LOWER] = structure.fill_lower_bound
    cells[Monitor.BAGS] = structure.bags
    cells[Monitor.STATES] = structure.states
