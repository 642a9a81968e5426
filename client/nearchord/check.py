"""The checker: confirms an answer from graph and definition of the question. It shares no code with the solver."""

from __future__ import annotations

import hashlib

from nearchord.answer import Answer
from nearchord.canonical import little_endian
from nearchord.checks.choice import check_choice
from nearchord.checks.confirmed import Confirmed
from nearchord.checks.fill import check_fill
from nearchord.checks.pins import weights_of
from nearchord.checks.structure import check_structure
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, Fill, Structure


def check(graph: Graph, answer: Answer) -> Confirmed:
    """Confirms what can be confirmed of `answer` from the graph alone; raises CheckFailed naming the place.

    A choice is confirmed with its value, a fill with everything that its columns bear witness to, and a bound where it
    is plain or rests on witnesses. The answer has to belong to this very graph and, where the question takes weights,
    to these weights. Time and memory O(n + m) for choices; for a fill of k edges O((n + m + k) log m) and what its
    packing takes.
    """
    _check_graph(graph, answer)
    match answer.question:
        case Choice():
            _check_weights(graph, answer)
            return check_choice(graph, answer, answer.question)
        case Fill():
            return check_fill(graph, answer)
        case Structure():
            return check_structure(graph, answer)
    raise CheckFailed(f"this client cannot check the question {answer.question.name!r}; update it")


def _check_graph(graph: Graph, answer: Answer) -> None:
    source = answer.provenance
    if source.graph_address != graph.address:
        raise CheckFailed(f"the answer is about the graph {source.graph_address}, not about this one ({graph.address})")


def _check_weights(graph: Graph, answer: Answer) -> None:
    """Unit weights may be left out or written down."""
    source, weights = answer.provenance, weights_of(graph)
    address = hashlib.sha256(little_endian(weights)).hexdigest()
    if source.weights_address not in ((address, "") if bool((weights == 1).all()) else (address,)):
        raise CheckFailed(
            f"the answer is about the weights {source.weights_address or '1'}, not about these ({address})"
        )
