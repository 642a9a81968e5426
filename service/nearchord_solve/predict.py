"""What an exact answer to each question would take on a graph of known structure.

States are those that count against the state budget.  With three colours or more a table is kept in every bag; the
other questions need none in bags without fill, so those cost them nothing.
"""

from collections.abc import Iterator
from math import comb

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.kernels import elimination
from nearchord_solve.kernels.layout import STATES, TABLE
from nearchord_solve.memory import state_bytes, table_bytes
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Prediction
from nearchord_solve.structure import Structure
from nearchord_solve.sweep.kernels import state_counts

COLOURS = (2, 3)


def predict(structure: Structure, budget: Budget, monitor: Monitor) -> tuple[Prediction, ...]:
    """States and memory of each question; counting ends above the budget, or when told to stop, with ``at_least``."""
    return (_independent_set(structure, budget), *_tabled(structure, budget, monitor))


def colour_states(size: int, colours: int) -> int:
    """States of so many colour classes in a bag without fill: its vertices are pairwise adjacent."""
    return sum(comb(size, i) for i in range(colours + 1))


def _plain_sizes(structure: Structure) -> list[tuple[int, int]]:
    """(size, number) of the bags outside fill cores."""
    nb = structure.numbering
    counts: I64 = elimination.clique_sizes(nb.low_ptr, nb.parent, nb.fill_end, nb.core, structure.cores.largest)
    return [(size, count) for size, count in enumerate(counts.tolist()) if count]


def _independent_set(structure: Structure, budget: Budget) -> Prediction:
    figures = structure.forest.figures
    memory = structure.held_bytes + int(table_bytes(figures[:, TABLE]).sum())
    return Prediction(
        question="independent-set",
        colours=0,
        states=structure.states,
        at_least=bool((figures[:, STATES] > budget.states).any()),
        memory_bytes=memory,
        fits=bool(structure.fitting(budget).all()),
    )


def _tabled(structure: Structure, budget: Budget, monitor: Monitor) -> Iterator[Prediction]:
    """The questions that keep tables in all bags."""
    sizes = _plain_sizes(structure)
    for colours in COLOURS:
        plain = 0 if colours == 2 else sum(count * colour_states(size, colours) for size, count in sizes)
        inside = state_counts.colour_states(structure.forest, colours, budget.states - plain, monitor.cells)
        whole = not structure.forest.bag_kind.size or (plain + int(inside) <= budget.states and not monitor.stop)
        yield _prediction("colourable-subgraph", colours, plain + int(inside), whole, structure, budget)
    room = budget.memory - structure.held_bytes
    states, whole = state_counts.forest_states(structure.forest, budget.states, room, monitor.cells)
    yield _prediction("induced-forest", 0, int(states), bool(whole), structure, budget)


def _prediction(
    question: str, colours: int, states: int, whole: bool, structure: Structure, budget: Budget
) -> Prediction:
    within = states <= budget.states
    memory = structure.held_bytes + state_bytes(states)
    partial = not whole
    return Prediction(question, colours, states, partial, memory, within and not partial and memory <= budget.memory)
