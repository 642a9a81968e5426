"""Answers for many weight vectors: each scenario is checked like an answer of its own."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace

import numpy as np

from nearchord.answer import Answer
from nearchord.checks.choice import check_choice
from nearchord.checks.columns import lists_of, numbers_of
from nearchord.checks.confirmed import Confirmed, check_unanswered
from nearchord.checks.edges import Ints
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, ColourableSubgraph
from nearchord.stages import Verdict


def check_scenarios(graph: Graph, answer: Answer, question: Choice, vectors: Ints) -> Confirmed:
    """Confirms choice and value of every scenario, and bounds where they are plain. `vectors`: int64[R, n].

    Value, bound and choice of the answer have to be those of the first. Time O(n + m) a scenario.
    """
    if answer.verdict is Verdict.INFEASIBLE:
        return check_choice(graph, answer, question)
    if answer.value is None:
        return check_unanswered(answer)
    scenarios = _one_by_one(answer, question, len(vectors))
    if (answer.value, answer.bound) != (scenarios[0].value, scenarios[0].bound) or not np.array_equal(
        answer.chosen, scenarios[0].chosen
    ):
        raise CheckFailed("value, bound and choice of the answer are not those of the first scenario")
    plain = 0
    left: Counter[str] = Counter()
    for number, (scenario, weights) in enumerate(zip(scenarios, vectors, strict=True), 1):
        try:
            confirmed = check_choice(graph.with_weights(weights), scenario, question)
        except CheckFailed as wrong:
            raise CheckFailed(f"scenario {number}: {wrong}") from None
        plain += not confirmed.not_confirmed
        left.update(words.partition(": ")[2] for words in confirmed.not_confirmed)
    what = [f"in all {len(vectors)} scenarios the chosen vertices meet the question and weigh what is said"]
    if plain:
        what.append(f"the bounds of {plain} scenarios are plain from the weights")
    return Confirmed(tuple(what), tuple(f"the bounds of {count} scenarios: {why}" for why, count in left.items()))


def _one_by_one(answer: Answer, question: Choice, count: int) -> list[Answer]:
    """The answer that each scenario is: PROVEN claims that value and bound meet in every one."""
    values, bounds = (numbers_of(answer, f"scenario_{name}", count).tolist() for name in ("value", "bound"))
    chosen = lists_of(answer, "scenario_start", "scenario_chosen", count)
    colours = (
        lists_of(answer, "scenario_start", "scenario_colour", count)
        if isinstance(question, ColourableSubgraph)
        else [np.zeros(0, np.uint32)] * count
    )
    return [
        replace(answer, value=value, bound=bound, chosen=of, columns={"colour": colour})
        for value, bound, of, colour in zip(values, bounds, chosen, colours, strict=True)
    ]
