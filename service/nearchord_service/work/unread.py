"""Answers for graphs that are predicted not to fit into the memory budget, given without reading them.

Without pins a choice needs no edges: a single vertex is always an independent set and all vertices always are a cover;
all weights together bound the one from above, and nothing bounds the other from below. Where pins make a choice depend
on the edges, there is not even a bound. Fill edges cannot be named without the edges: their number is at least 0.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from nearchord_service.model.answer import Answer, Column, ElementType
from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work.content import weight_values

if TYPE_CHECKING:
    from nearchord_service.work.port import Task

_PIECE = 1 << 20


def answer(task: Task, predicted_bytes: int) -> Answer:
    """Answer `task` BOUNDED without its graph. O(n) time when there are no pins, O(1) memory beside the choice."""
    reason = (
        f"solving {task.vertices} vertices and {task.edges} edges is predicted to take {predicted_bytes} bytes of "
        f"memory, more than the {task.budget.memory_bytes} bytes budgeted; allow at least as many to have it solved"
    )
    if not task.question.name.chooses:
        return Answer(Verdict.BOUNDED, reason, bound=(0, 1), fill_lower_bound=0)
    if task.question.must or task.question.never or not task.vertices:
        return Answer(Verdict.BOUNDED, reason)
    total, heaviest, weight = _scan(task)
    reason += "; the choice given is only the plainest feasible one"
    if task.question.name is QuestionName.VERTEX_COVER:
        everything = np.arange(task.vertices, dtype="<u4")
        return Answer(Verdict.BOUNDED, reason, (total, 1), (0, 1), columns=(_column(everything.tobytes()),))
    one = heaviest.to_bytes(4, "little")
    return Answer(Verdict.BOUNDED, reason, (weight, 1), (total, 1), columns=(_column(one),))


def _column(data: bytes) -> Column:
    return Column("chosen", ElementType.UINT32, data)


def _scan(task: Task) -> tuple[int, int, int]:
    """Return the sum of all weights, and the heaviest vertex (lowest number) with its weight."""
    if task.weights is None:
        return task.vertices, 0, 1
    values = weight_values(task.weights, task.vertices)
    total, heaviest, weight = 0, 0, -1
    for start in range(0, task.vertices, _PIECE):
        piece = values[start : start + _PIECE]
        total += int(piece.sum())
        best = int(piece.argmax())
        if int(piece[best]) > weight:
            heaviest, weight = start + best, int(piece[best])
    return total, heaviest, weight
