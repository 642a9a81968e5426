"""Add-on ``best``: so many of the heaviest independent sets, each different from the others, the pins kept."""

import numpy as np

from nearchord_solve.arrays import U32
from nearchord_solve.questions.addons.added import Added, Settled
from nearchord_solve.questions.pins import lift
from nearchord_solve.sweep.best_sets import BestSets
from nearchord_solve.sweep.independent import as_vertices


def add_best(settled: Settled, most: int) -> Added:
    """Columns ``best_value``, ``best_start``, ``best_chosen``: fewer than ``most`` sets only if there are no more."""
    task, swept, rest = settled.task, settled.swept, settled.rest
    room = task.budget.memory - swept.structure.held_bytes
    search = BestSets(task.graph, swept, most)
    if not search.run(room, task.gauge.monitor):
        return Added(note="seconds ran out" if task.stop else f"memory budget: {most} sets do not fit")
    order = swept.structure.numbering.order
    values = [swept.bound + rest.taken_weight - known.cost for known in search.known]
    sizes = [int(np.bitwise_count(known.bits).sum()) + rest.taken.size for known in search.known]
    if sum(sizes) * 8 > room:
        return Added(note=f"memory budget: {most} sets do not fit")
    sets: list[U32] = []
    for number in range(len(values)):
        chosen = np.empty(order.size, np.uint8)
        chosen[order] = search.by_place(number)
        sets.append(lift(rest, as_vertices(chosen)))
    start = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.array(sizes, np.int64))))
    return Added({"best_value": np.array(values, np.int64), "best_start": start, "best_chosen": np.concatenate(sets)})
