"""The question as it was asked beside the one that an answer says it answers, and the numbers that both are about."""

from __future__ import annotations

import hashlib

import numpy as np

from nearchord.answer import Answer
from nearchord.canonical import little_endian
from nearchord.checks.edges import Ints, Mask
from nearchord.checks.pins import mask_of, weights_of
from nearchord.errors import BadInput, CheckFailed
from nearchord.graph import Graph
from nearchord.question import Pin, Question, pins_of


def check_asked(graph: Graph, answer: Answer, asked: Question) -> None:
    """CheckFailed unless the answer is to this very question."""
    if type(asked) is not type(answer.question):
        raise CheckFailed(f"the answer is to the question {answer.question.name}, not to {asked.name}")
    pairs = zip(("must", "never"), pins_of(asked), pins_of(answer.question), strict=True)
    for field, wanted, answered in pairs:
        if not np.array_equal(_pins(graph, field, wanted), mask_of(graph, answered, field)):
            raise CheckFailed(f"the answer is to a question with other vertices in {field}")
    for field in asked.add_ons():
        value, other = _add_on(asked, field), _add_on(answer.question, field)
        if value != other:
            raise CheckFailed(f"the answer is to a question with {field}={other!r}, not {value!r}")


def _pins(graph: Graph, field: str, pins: tuple[Pin, ...]) -> Mask:
    try:
        return mask_of(graph, pins, field)
    except KeyError as name:
        raise BadInput(f"{field} has {name}, which is no vertex of the graph", "give names of the graph") from None


def _add_on(question: Question, field: str) -> object:
    """What was asked for; a best of 1 is the answer's own choice, as one of 0 is."""
    if field == "scenarios":
        return question.scenario_count
    value = getattr(question, field)
    return max(1, value) if field == "best" else value


def vectors_of(graph: Graph, answer: Answer, asked: Question) -> Ints:
    """The weights, demands or scenarios (int64[R, n]) that the answer is about; O(n) to compare their addresses.

    Weights are those of the graph; scenarios and demands those of the question as it was asked, because an answer does
    not carry them. CheckFailed when the answer is about others, BadInput when they are missing.
    """
    vectors, address, what = asked.vectors, answer.provenance.weights_address, _kind(asked)
    if vectors is None and (what == "scenarios" or (what == "demands" and address)):
        remedy = "give the question as it was asked: question= (on the command line its options)"
        raise BadInput(f"the answer is about {what}, which it does not carry", remedy)
    if vectors is None:
        vectors = weights_of(graph) if what == "weights" else np.ones(graph.n, np.int64)
    if vectors.shape[-1] != graph.n:
        raise BadInput(f"there are {vectors.shape[-1]} {what} for {graph.n} vertices", "give one a vertex")
    own = hashlib.sha256(little_endian(vectors.reshape(-1))).hexdigest()
    if address not in ((own, "") if bool((vectors == 1).all()) else (own,)):
        raise CheckFailed(f"the answer is about the {what} {address or '1'}, not about these ({own})")
    return vectors


def _kind(asked: Question) -> str:
    if not asked.takes_weights:
        return "demands"
    return "scenarios" if asked.scenario_count else "weights"
