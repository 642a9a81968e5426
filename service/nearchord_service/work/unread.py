"""Answers for graphs that are predicted not to fit into the memory budget, given without reading them.

Without pins a choice needs no edges: a single vertex is always an independent set and all vertices always are a cover;
all weights together bound the one from above, and nothing bounds the other from below. Where pins make a choice depend
on the edges, there is not even a bound. Colours need no edges either: all vertices in turn, each with colours or a
share of the frame of its own, take all demands together, and no answer takes less than the largest of them. Fill edges
cannot be named without the edges: their number is at least 0.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord_service.model.answer import Answer, Column, ElementType
from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work.content import weight_values

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from nearchord_service.work.port import Task

_PIECE = 1 << 20


def answer(task: Task, predicted_bytes: int) -> Answer:
    """Answer `task` BOUNDED without its graph.

    Time O(weights) when there are no pins; memory O(1) beside the choice, and O(n) for colours and frames.
    """
    reason = (
        f"solving {task.vertices} vertices and {task.edges} edges is predicted to take {predicted_bytes} bytes of "
        f"memory, more than the {task.budget.memory_bytes} bytes budgeted; allow at least as many to have it solved"
    )
    name = task.question.name
    if not name.takes_weights:
        return Answer(Verdict.BOUNDED, reason, bound=(0, 1), fill_lower_bound=0)
    if task.question.must or task.question.never or not task.vertices:
        return Answer(Verdict.BOUNDED, reason)
    if name.takes_demands:
        return _in_turn(task, reason)
    return _plainest(task, reason + "; the choice given is only the plainest feasible one")


def _plainest(task: Task, reason: str) -> Answer:
    """Choose a single vertex in each scenario, or all for a cover; nothing where nothing may be chosen."""
    question = task.question
    if question.limit == 0:
        return Answer(Verdict.BOUNDED, reason, (0, 1), (0, 1), columns=(_vertices("chosen", ()),))
    scanned = _scan(task)
    total, heaviest, weight = scanned[0]
    if question.name is QuestionName.VERTEX_COVER:
        everything = _vertices("chosen", np.arange(task.vertices))
        return Answer(Verdict.BOUNDED, reason, (total, 1), (0, 1), columns=(everything,))
    columns = [_vertices("chosen", (heaviest,))]
    if question.colours:
        columns.append(_vertices("colour", (1,)))
    if question.scenarios:
        totals, heaviests, weights = zip(*scanned, strict=True)
        columns += [
            _numbers("scenario_value", weights),
            _numbers("scenario_bound", totals),
            _numbers("scenario_start", np.arange(len(scanned) + 1)),
            _vertices("scenario_chosen", heaviests),
        ]
        if question.colours:
            columns.append(_vertices("scenario_colour", np.ones(len(scanned))))
    return Answer(Verdict.BOUNDED, reason, (weight, 1), (total, 1), columns=tuple(columns))


def _in_turn(task: Task, reason: str) -> Answer:
    """Give every vertex colours or a share of its own, where so many colours fit into the memory budgeted."""
    if task.weights is None:
        demands = np.ones(task.vertices, np.int64)
    else:
        demands = weight_values(task.weights, task.vertices)
    total, bound = int(demands.sum()), (int(demands.max()), 1)
    if task.question.name is QuestionName.FRACTIONAL_COLOURING:
        columns = _shares(demands)
    elif total * 4 > task.budget.memory_bytes:
        return Answer(Verdict.BOUNDED, reason, bound=bound)
    else:
        columns = _colours(demands, total)
    reason += "; the answer given is only the plainest one, in which no two vertices share anything"
    return Answer(Verdict.BOUNDED, reason, (total, 1), bound, columns=columns)


def _shares(demands: NDArray[np.int64]) -> tuple[Column, ...]:
    needy = np.flatnonzero(demands)
    return (
        _numbers("share_start", np.arange(needy.size + 1)),
        _vertices("share_vertex", needy),
        _numbers("share_numerator", demands[needy]),
        _numbers("share_denominator", (1,)),
    )


def _colours(demands: NDArray[np.int64], total: int) -> tuple[Column, ...]:
    colours = _vertices("colour", np.arange(1, total + 1, dtype="<u4"))
    if bool((demands == 1).all()):
        return (colours,)
    return colours, _numbers("colour_start", np.concatenate(([0], np.cumsum(demands))))


def _vertices(name: str, values: Any) -> Column:
    return Column(name, ElementType.UINT32, np.asarray(values, "<u4").tobytes())


def _numbers(name: str, values: Any) -> Column:
    return Column(name, ElementType.INT64, np.asarray(values, "<i8").tobytes())


def _scan(task: Task) -> list[tuple[int, int, int]]:
    """Return the sum of all weights, and the heaviest vertex (lowest number) with its weight, scenario by scenario."""
    if task.weights is None:
        return [(task.vertices, 0, 1)]
    values = weight_values(task.weights, task.vertices, task.question.scenarios)
    return [_scan_one(vector) for vector in np.atleast_2d(values)]


def _scan_one(values: NDArray[np.int64]) -> tuple[int, int, int]:
    total, heaviest, weight = 0, 0, -1
    for start in range(0, values.size, _PIECE):
        piece = values[start : start + _PIECE]
        total += int(piece.sum())
        best = int(piece.argmax())
        if int(piece[best]) > weight:
            heaviest, weight = start + best, int(piece[best])
    return total, heaviest, weight
