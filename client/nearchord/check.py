"""The checker: confirms an answer from graph and definition of the question. It shares no code with the solver."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.canonical import little_endian, weight_sum
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import IndependentSet, Pin, Question, VertexCover
from nearchord.stages import Verdict

Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class Confirmed:
    """What a check confirmed and what it could not, each in words."""

    what: tuple[str, ...]
    not_confirmed: tuple[str, ...]


def check(graph: Graph, answer: Answer) -> Confirmed:
    """Confirms choice, value and, where it is plain, bound of `answer`; raises CheckFailed naming the place.

    The answer has to belong to this very graph and its weights. Time and memory O(n + m).
    """
    _check_subject(graph, answer)
    if answer.verdict is Verdict.INFEASIBLE:
        return _check_infeasible(graph, answer)
    if answer.value is None:
        return _check_unanswered(answer)
    chosen = _chosen_mask(graph, answer)
    done = [_check_choice(graph, answer.question, chosen), _check_value(graph, answer, chosen)]
    plain = _check_bound(graph, answer)
    if plain is not None:
        return Confirmed((*done, plain), ())
    return Confirmed(tuple(done), (f"the bound {answer.bound}: the answer carries no proof of it",))


def _check_subject(graph: Graph, answer: Answer) -> None:
    """The answer names the graph and the weights it is about."""
    source = answer.provenance
    if source.graph_address != graph.address:
        raise CheckFailed(f"the answer is about the graph {source.graph_address}, not about this one ({graph.address})")
    weights = _weights(graph)
    address = hashlib.sha256(little_endian(weights)).hexdigest()
    if source.weights_address not in ((address, "") if bool((weights == 1).all()) else (address,)):
        raise CheckFailed(
            f"the answer is about the weights {source.weights_address or '1'}, not about these ({address})"
        )


def _check_infeasible(graph: Graph, answer: Answer) -> Confirmed:
    """The pins have to contradict each other: a vertex in both lists, or two ends of an edge forced the wrong way."""
    must, never = (_mask(graph, getattr(answer.question, field), field) for field in ("must", "never"))
    both = np.flatnonzero(must & never)
    if both.size:
        return Confirmed((f"the pins contradict each other: vertex {graph.label(int(both[0]))} is in both lists",), ())
    clash = _edge_inside(graph, never if isinstance(answer.question, VertexCover) else must)
    if clash is None:
        raise CheckFailed("the verdict is INFEASIBLE, but the pins do not contradict each other")
    return Confirmed((f"the pins contradict each other at the edge {clash}",), ())


def _check_unanswered(answer: Answer) -> Confirmed:
    if answer.verdict.answered:
        raise CheckFailed(f"the verdict is {answer.verdict}, but there is no value")
    if answer.chosen.size:
        raise CheckFailed(f"{answer.chosen.size} vertices are chosen, but there is no value")
    return Confirmed((), (f"anything: the job ended {answer.verdict} without an answer",))


def _chosen_mask(graph: Graph, answer: Answer) -> Mask:
    """The choice as a mask; its vertices have to ascend and to exist."""
    chosen = answer.chosen.astype(np.int64)
    if chosen.size and int(chosen.max()) >= graph.n:
        raise CheckFailed(f"vertex {int(chosen.max())} is chosen, but the graph has {graph.n} vertices")
    disorder = np.flatnonzero(np.diff(chosen) <= 0)
    if disorder.size:
        raise CheckFailed(f"the chosen vertices do not ascend at vertex {graph.label(int(chosen[disorder[0] + 1]))}")
    return _mask(graph, chosen.tolist(), "chosen")


def _mask(graph: Graph, vertices: Iterable[Pin], field: str) -> Mask:
    mask = np.zeros(graph.n, np.bool_)
    numbers = [graph.vertex(v) if isinstance(v, str) else v for v in vertices]
    if numbers and max(numbers) >= graph.n:
        raise CheckFailed(f"{field} has vertex {max(numbers)}, but the graph has {graph.n} vertices")
    mask[numbers] = True
    return mask


def _edge_inside(graph: Graph, mask: Mask) -> str | None:
    """The first edge with both ends in a set."""
    u, v = graph.edges()
    inside = mask[u] & mask[v]
    if not inside.any():
        return None
    place = int(inside.argmax())
    return f"{{{graph.label(int(u[place]))}, {graph.label(int(v[place]))}}}"


def _check_choice(graph: Graph, question: Question, chosen: Mask) -> str:
    """The choice meets the definition of the question and its pins."""
    _check_pins(graph, question, chosen)
    if isinstance(question, IndependentSet):
        clash = _edge_inside(graph, chosen)
        if clash is not None:
            raise CheckFailed(f"the chosen set has the edge {clash} inside")
        return f"no edge lies inside the {int(chosen.sum())} chosen vertices"
    if isinstance(question, VertexCover):
        clash = _edge_inside(graph, ~chosen)
        if clash is not None:
            raise CheckFailed(f"the chosen set does not touch the edge {clash}")
        return f"the {int(chosen.sum())} chosen vertices touch all {graph.m} edges"
    raise CheckFailed(f"this client cannot check the question {question.name!r}; update it")


def _check_pins(graph: Graph, question: Question, chosen: Mask) -> None:
    absent = np.flatnonzero(_mask(graph, question.must, "must") & ~chosen)
    if absent.size:
        raise CheckFailed(f"vertex {graph.label(int(absent[0]))} must be chosen, but is not")
    present = np.flatnonzero(_mask(graph, question.never, "never") & chosen)
    if present.size:
        raise CheckFailed(f"vertex {graph.label(int(present[0]))} must not be chosen, but is")


def _weights(graph: Graph) -> NDArray[np.int64]:
    return np.ones(graph.n, np.int64) if graph.weights is None else graph.weights


def _check_value(graph: Graph, answer: Answer, chosen: Mask) -> str:
    weight = weight_sum(_weights(graph)[chosen])
    if weight != answer.value:
        raise CheckFailed(f"the value is given as {answer.value}, but the chosen vertices weigh {weight}")
    return f"the chosen vertices weigh {weight}"


def _check_bound(graph: Graph, answer: Answer) -> str | None:
    """Words for a bound that is plain from the weights alone; None where it takes a proof.

    Every solution holds all `must` vertices and no `never` vertex, so it weighs at least the first and at most all but
    the second. A bound on the wrong side of the value, or a PROVEN one that does not meet it, is wrong in any case.
    """
    value, bound = answer.value, answer.bound
    if value is None or bound is None:
        raise CheckFailed(f"the verdict is {answer.verdict}, but there is no bound")
    if (bound < value) if answer.question.maximises else (bound > value):
        raise CheckFailed(f"the bound {bound} contradicts the value {value}")
    if answer.verdict is Verdict.PROVEN and bound != value:
        raise CheckFailed(f"the verdict is PROVEN, but the bound {bound} is not the value {value}")
    weights = _weights(graph)
    if answer.question.maximises and bound >= weight_sum(weights[~_mask(graph, answer.question.never, "never")]):
        return f"the bound {bound}: all vertices that may be chosen weigh no more"
    if not answer.question.maximises and bound <= weight_sum(weights[_mask(graph, answer.question.must, "must")]):
        return f"the bound {bound}: the vertices that must be chosen weigh no less"
    return None
