"""Choices of vertices: feasible by definition, worth what they say, bounded where it is plain."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.canonical import weight_sum
from nearchord.checks.bounds import check_bound
from nearchord.checks.classes_of_choice import check_colours, check_forest
from nearchord.checks.confirmed import Confirmed, check_unanswered
from nearchord.checks.contradictions import check_must
from nearchord.checks.edges import Mask
from nearchord.checks.pins import mask_of, weights_of
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, Clique, ColourableSubgraph, IndependentSet, InducedForest, VertexCover
from nearchord.stages import Verdict


def check_choice(graph: Graph, answer: Answer, question: Choice) -> Confirmed:
    """Confirms choice, value and, where it is plain, bound. O(n + m)."""
    if answer.verdict is Verdict.INFEASIBLE:
        return _check_infeasible(graph, question)
    if answer.value is None:
        return check_unanswered(answer)
    chosen = chosen_mask(graph, answer.chosen)
    done = [check_definition(graph, question, chosen, answer.colour), _check_value(graph, answer, chosen)]
    proven, left = check_bound(graph, answer, question)
    return Confirmed((*done, *filter(None, (proven,))), tuple(filter(None, (left,))))


def _check_infeasible(graph: Graph, question: Choice) -> Confirmed:
    """The pins have to contradict each other, or the limit: a vertex in both lists, or two ends of an edge forced the
    wrong way, or more vertices forced than allowed."""
    must, never = (mask_of(graph, getattr(question, field), field) for field in ("must", "never"))
    both = np.flatnonzero(must & never)
    if both.size:
        return Confirmed((f"the pins contradict each other: vertex {graph.label(int(both[0]))} is in both lists",), ())
    if isinstance(question, IndependentSet) and question.limit is not None and int(must.sum()) > question.limit:
        return Confirmed((f"{int(must.sum())} vertices must be chosen, but the limit is {question.limit}",), ())
    if isinstance(question, Clique):
        pair = _no_edge_inside(graph, must)
        if pair is not None:
            return Confirmed((f"the pins contradict each other: {pair} is no edge",), ())
    if isinstance(question, ColourableSubgraph | InducedForest):
        return check_must(graph, question, must)
    clash = None if isinstance(question, Clique) else _edge_inside(graph, _forced(question, must, never))
    if clash is None:
        raise CheckFailed("the verdict is INFEASIBLE, but the pins do not contradict each other")
    return Confirmed((f"the pins contradict each other at the edge {clash}",), ())


def _forced(question: Choice, must: Mask, never: Mask) -> Mask:
    """Vertices that the pins force into one independent set."""
    return never if isinstance(question, VertexCover) else must


def chosen_mask(graph: Graph, vertices: NDArray[np.uint32]) -> Mask:
    """A choice as a mask; its vertices have to ascend and to exist."""
    chosen = vertices.astype(np.int64)
    if chosen.size and int(chosen.max()) >= graph.n:
        raise CheckFailed(f"vertex {int(chosen.max())} is chosen, but the graph has {graph.n} vertices")
    disorder = np.flatnonzero(np.diff(chosen) <= 0)
    if disorder.size:
        raise CheckFailed(f"the chosen vertices do not ascend at vertex {graph.label(int(chosen[disorder[0] + 1]))}")
    return mask_of(graph, chosen.tolist(), "chosen")


def _edge_inside(graph: Graph, mask: Mask) -> str | None:
    """The first edge with both ends in a set."""
    u, v = graph.edges()
    inside = mask[u] & mask[v]
    if not inside.any():
        return None
    place = int(inside.argmax())
    return f"{{{graph.label(int(u[place]))}, {graph.label(int(v[place]))}}}"


def _no_edge_inside(graph: Graph, mask: Mask) -> str | None:
    """The first pair of a set without an edge between its ends."""
    u, v = graph.edges()
    inside = mask[u] & mask[v]
    degree = np.bincount(u[inside], minlength=graph.n) + np.bincount(v[inside], minlength=graph.n)
    short = np.flatnonzero(mask & (degree < int(mask.sum()) - 1))
    if not short.size:
        return None
    one = int(short[0])
    near = np.concatenate((v[inside & (u == one)], u[inside & (v == one)]))
    far = mask.copy()
    far[near] = False
    far[one] = False
    return f"{{{graph.label(one)}, {graph.label(int(np.flatnonzero(far)[0]))}}}"


def check_definition(graph: Graph, question: Choice, chosen: Mask, colour: NDArray[np.uint32]) -> str:
    """Words for a choice that meets the definition of the question and its pins; CheckFailed where it does not."""
    _check_pins(graph, question, chosen)
    if isinstance(question, ColourableSubgraph):
        return check_colours(graph, chosen, colour, question.colours)
    if isinstance(question, InducedForest):
        return check_forest(graph, chosen)
    if isinstance(question, IndependentSet):
        clash = _edge_inside(graph, chosen)
        if clash is not None:
            raise CheckFailed(f"the chosen set has the edge {clash} inside")
        return f"no edge lies inside the {_within(question, chosen)} chosen vertices"
    if isinstance(question, VertexCover):
        clash = _edge_inside(graph, ~chosen)
        if clash is not None:
            raise CheckFailed(f"the chosen set does not touch the edge {clash}")
        return f"the {int(chosen.sum())} chosen vertices touch all {graph.m} edges"
    if isinstance(question, Clique):
        pair = _no_edge_inside(graph, chosen)
        if pair is not None:
            raise CheckFailed(f"the chosen vertices {pair} are not adjacent")
        return f"the {int(chosen.sum())} chosen vertices are pairwise adjacent"
    raise CheckFailed(f"this client cannot check the question {question.name!r}; update it")


def _within(question: IndependentSet, chosen: Mask) -> str:
    """The number of chosen vertices, which the limit allows."""
    count = int(chosen.sum())
    if question.limit is None:
        return str(count)
    if count > question.limit:
        raise CheckFailed(f"{count} vertices are chosen, but the limit is {question.limit}")
    return f"{count} (at most {question.limit})"


def _check_pins(graph: Graph, question: Choice, chosen: Mask) -> None:
    absent = np.flatnonzero(mask_of(graph, question.must, "must") & ~chosen)
    if absent.size:
        raise CheckFailed(f"vertex {graph.label(int(absent[0]))} must be chosen, but is not")
    present = np.flatnonzero(mask_of(graph, question.never, "never") & chosen)
    if present.size:
        raise CheckFailed(f"vertex {graph.label(int(present[0]))} must not be chosen, but is")


def _check_value(graph: Graph, answer: Answer, chosen: Mask) -> str:
    weight = weight_sum(weights_of(graph)[chosen])
    if weight != answer.value:
        raise CheckFailed(f"the value is given as {answer.value}, but the chosen vertices weigh {weight}")
    return f"the chosen vertices weigh {weight}"
