"""The best sets and the number of optima. That no other set is better takes a new computation; the sets themselves are
checked from the definition, and all that an answer says about optima is held against each other."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.canonical import weight_sum
from nearchord.checks.choice import check_definition, chosen_mask
from nearchord.checks.columns import column_of, lists_of
from nearchord.checks.pins import weights_of
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import IndependentSet


def check_best(graph: Graph, answer: Answer, question: IndependentSet) -> str:
    """Words for best sets that are what they say; CheckFailed for others. O(n + m) a set.

    Each has to meet the question, to be worth its value, to differ from the others and to be no better than the one
    before; the first is the choice of the answer.
    """
    values = column_of(answer, "best_value", np.int64)
    sets = lists_of(answer, "best_start", "best_chosen", values.size)
    if not 1 <= values.size <= question.best:
        raise CheckFailed(f"there are {values.size} best sets, but {question.best} were asked for")
    if not np.array_equal(sets[0], answer.chosen) or int(values[0]) != answer.value:
        raise CheckFailed("the first of the best sets is not the choice of the answer")
    rising = np.flatnonzero(np.diff(values) > 0)
    if rising.size:
        raise CheckFailed(f"best set {int(rising[0]) + 2} is worth more than the one before")
    if len({chosen.tobytes() for chosen in sets}) < len(sets):
        raise CheckFailed("two of the best sets are the same")
    for place, (value, chosen) in enumerate(zip(values.tolist(), sets, strict=True), 1):
        _check_set(graph, question, place, value, chosen)
    return f"the {len(sets)} best sets differ, meet the question, and are worth what is said"


def _check_set(graph: Graph, question: IndependentSet, place: int, value: int, chosen: NDArray[np.uint32]) -> None:
    try:
        mask = chosen_mask(graph, chosen)
        check_definition(graph, question, mask, np.zeros(0, np.uint32))
    except CheckFailed as wrong:
        raise CheckFailed(f"best set {place}: {wrong}") from None
    weight = weight_sum(weights_of(graph)[mask])
    if weight != value:
        raise CheckFailed(f"best set {place} is given the value {value}, but weighs {weight}")


def check_optima(answer: Answer, question: IndependentSet) -> None:
    """CheckFailed where number of optima, best sets and prices of a proven answer cannot all be right.

    An optimum is the only one exactly when no vertex may change sides for nothing, and the least price at which one
    does leads to the second best set. The columns have been checked by themselves.
    """
    count, others = answer.count, _other_sides(answer) if question.prices else None
    values = answer.columns.get("best_value") if question.best > 1 else None
    if count is not None and count < 1:
        raise CheckFailed(f"the number of best sets is given as {count}")
    if values is not None and count is not None:
        ties = int((values == values[0]).sum())
        if count < ties or (count > ties and (ties < values.size or values.size < question.best)):
            raise CheckFailed(f"the number of best sets is not the {ties} of greatest value that are listed")
    if others is None:
        return
    if count is not None and (count == 1) != bool((others > 0).all()):
        raise CheckFailed("number of best sets and prices disagree whether there is only one")
    if values is not None and (values.size > 1) != bool(others.size):
        raise CheckFailed("best sets and prices disagree whether there is a second")
    if values is not None and values.size > 1 and int(values[0] - values[1]) != int(others.min()):
        raise CheckFailed(f"the second best set is worse by {int(values[0] - values[1])}, the least price is another")


def _other_sides(answer: Answer) -> NDArray[np.int64] | None:
    """What it costs each vertex that may change sides to do so; None without prices."""
    price_in, price_out = answer.columns.get("price_in"), answer.columns.get("price_out")
    if price_in is None or price_out is None:
        return None
    other: NDArray[np.int64] = np.where(np.minimum(price_in, price_out) < 0, -1, np.maximum(price_in, price_out))
    return other[other >= 0]
