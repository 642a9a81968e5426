"""Less fill than the heuristics found, by exact search, for jobs whose fill budget would not suffice otherwise."""

from dataclasses import replace

from nearchord_solve.budget import Budget
from nearchord_solve.fill.exact import fill_of_graph
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.structure import Structure
from nearchord_solve.tree import with_fill


def over_fill(structure: Structure, budget: Budget) -> bool:
    """Whether a structure has more fill than the budget admits."""
    return budget.fill is not None and structure.fill > budget.fill


def search_less_fill(graph: Graph, structure: Structure, budget: Budget, monitor: Monitor) -> Structure:
    """A structure within the fill budget if the search finds one, otherwise the same one; with the lower bound found.

    Goes on until the fill number is known, or known to be above the budget, or until stopped.
    """
    found = fill_of_graph(graph, structure, budget.fill, monitor, budget.memory)
    if budget.fill is not None and found.upper_bound <= budget.fill:
        other = with_fill(structure, found.edges, found.lower_bound, budget, monitor)
        if isinstance(other, Structure):
            return other
    return replace(structure, plain=False, proven=max(structure.proven, found.lower_bound))
