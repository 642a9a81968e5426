"""Add-on ``count``: how many sets are best, the pins kept.

Every set counts that has the greatest weight, also those that differ only in vertices of weight zero.
"""

from nearchord_solve.questions.addons.added import Added, Settled
from nearchord_solve.sweep.counting import OutOfRoom, count_best


def add_count(settled: Settled) -> Added:
    """The number of best sets; vertices that the pins have settled are the same in all of them."""
    task = settled.task
    room = task.budget.memory - settled.swept.structure.held_bytes
    try:
        count = count_best(settled.swept, room, task.gauge.monitor)
    except OutOfRoom:
        return Added(note="memory budget: the sums and products of the best states do not fit")
    return Added(count=count) if count is not None else Added(note="seconds ran out while they were counted")
