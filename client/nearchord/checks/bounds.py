"""The bound of a choice, confirmed where it is plain from the weights or an answer brings a proof of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.canonical import weight_sum
from nearchord.checks.cliques import heavier_clique
from nearchord.checks.confirmed import check_sides
from nearchord.checks.edges import Edges, Ints
from nearchord.checks.elimination import bags_of, filled, has_order, no_fill, ordered, rows_of
from nearchord.checks.labelled import FORESTS, Program, Rules, colour_rules, extra_weight
from nearchord.checks.pins import Pins, common_neighbours, mask_of, pins_of, weights_of
from nearchord.checks.splitting import Splitting, has_splitting
from nearchord.checks.states import TooManyStates
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import Choice, Clique, ColourableSubgraph, IndependentSet, InducedForest, VertexCover
from nearchord.stages import ProofKind


def check_bound(graph: Graph, answer: Answer, question: Choice) -> tuple[str | None, str | None]:
    """Words for a bound that is confirmed, and words for one that is left open; one of them is None.

    CheckFailed where the bound contradicts the value, or the proof in the answer does not prove it.
    """
    check_sides(answer)
    bound = answer.bound
    if not isinstance(bound, int):
        raise CheckFailed(f"the bound is given as {bound}, but weights are whole numbers")
    plain = _plain(graph, bound, question)
    if plain is not None:
        return plain, None
    try:
        proven = _proven(graph, answer, bound, question)
    except TooManyStates as limit:
        return None, f"the bound {bound}: {str(limit) or 'checking its proof would take too long'}"
    if proven is not None:
        return proven, None
    return None, f"the bound {bound}: {_without_proof(answer)}"


def _without_proof(answer: Answer) -> str:
    """Why the bound of an answer without proof columns stays open, and what can be done about it."""
    if ProofKind.CERTIFICATE in (answer.proof, *answer.proof_kinds):
        return "its proof is not at hand; `solve --proof FILE` writes it, `check --proof FILE` reads it"
    if ProofKind.SEARCH in (answer.proof, *answer.proof_kinds):
        return "it rests on a search, which leaves no proof"
    return "the answer carries no proof of it"


def _plain(graph: Graph, bound: int, question: Choice) -> str | None:
    """Words for a bound that is plain from the weights alone; None where it takes a proof.

    Every solution holds all `must` vertices and no `never` vertex, so it weighs at least the first and at most all but
    the second.
    """
    weights = weights_of(graph)
    if question.maximises and bound >= weight_sum(weights[~mask_of(graph, question.never, "never")]):
        return f"the bound {bound}: all vertices that may be chosen weigh no more"
    if isinstance(question, IndependentSet) and question.limit is not None:
        most = _heaviest(weights, pins_of(graph, question), question.limit)
        if bound >= most:
            return f"the bound {bound}: no {question.limit} vertices that may be chosen weigh more"
    if not question.maximises and bound <= weight_sum(weights[mask_of(graph, question.must, "must")]):
        return f"the bound {bound}: the vertices that must be chosen weigh no less"
    return None


def _heaviest(weights: Ints, pins: Pins, limit: int) -> int:
    """What so many vertices weigh at most: those that must be chosen, and the heaviest of the others."""
    room = max(0, limit - int(pins.must.sum()))
    others = np.sort(weights[~pins.must & ~pins.never])
    return weight_sum(weights[pins.must]) + weight_sum(others[max(0, others.size - room) :])


def _proven(graph: Graph, answer: Answer, bound: int, question: Choice) -> str | None:
    """Words for a bound that the proof in the answer confirms, None without one; CheckFailed where it does not."""
    claim = _Claim(graph, Edges(graph.n, *graph.edges()), answer.columns, bound, pins_of(graph, question))
    match question:
        case VertexCover() if has_splitting(answer.columns):
            return _split_cover(claim)
        case IndependentSet() | ColourableSubgraph(colours=1) if has_splitting(answer.columns):
            return _split(claim)
        case Clique() if has_order(answer.columns):
            return _cliques(claim)
        case ColourableSubgraph(colours=colours) if colours > 1 and has_order(answer.columns):
            return _labelled(claim, colour_rules(colours))
        case InducedForest() if has_order(answer.columns):
            return _labelled(claim, FORESTS)
    return None


@dataclass(frozen=True)
class _Claim:
    """A bound and what an answer brings to prove it."""

    graph: Graph
    edges: Edges
    columns: Mapping[str, NDArray[Any]]
    bound: int
    pins: Pins

    @property
    def weights(self) -> Ints:
        return weights_of(self.graph)

    def words(self, proven: int, how: str, *, maximises: bool = True) -> str:
        """CheckFailed unless what is proven is the bound or better."""
        if (proven > self.bound) if maximises else (proven < self.bound):
            raise CheckFailed(f"the bound is given as {self.bound}, but the proof comes to {proven}")
        return f"the bound {self.bound}: {how}"


def _split(claim: _Claim) -> str:
    splitting = Splitting(claim.graph.n, claim.columns)
    return claim.words(_split_weight(claim, splitting, claim.pins), splitting.summary)


def _split_cover(claim: _Claim) -> str:
    """A cover is what an independent set leaves, with the pins the other way round."""
    splitting = Splitting(claim.graph.n, claim.columns)
    most = _split_weight(claim, splitting, Pins(claim.pins.never, claim.pins.must))
    return claim.words(weight_sum(claim.weights) - most, splitting.summary, maximises=False)


def _split_weight(claim: _Claim, splitting: Splitting, pins: Pins) -> int:
    """What no independent set outweighs.

    What must be in it counts in full, its neighbours and what may not be in it count for nothing.
    """
    u, v = claim.edges.u, claim.edges.v
    out = pins.must | pins.never
    out[v[pins.must[u]]] = True
    out[u[pins.must[v]]] = True
    return weight_sum(claim.weights[pins.must]) + splitting.bound(claim.edges, np.where(out, 0, claim.weights))


def _cliques(claim: _Claim) -> str:
    """What must be chosen counts in full, and only vertices joined to all of it can join it."""
    left = common_neighbours(claim.edges, claim.pins.must) & ~claim.pins.never
    place = ordered(claim.columns, left)
    rows, weights = rows_of(claim.edges, place, no_fill()), _by_place(place, claim.weights)
    heavier, tried = heavier_clique(rows, weights, claim.bound - weight_sum(claim.weights[claim.pins.must]))
    if heavier is not None:
        names = ", ".join(claim.graph.label(int(v)) for v in np.flatnonzero(np.isin(place, heavier)))
        raise CheckFailed(f"the bound is given as {claim.bound}, but the clique {{{names}}} makes more possible")
    return f"the bound {claim.bound}: no vertex and its later neighbours in an order hold more ({tried} vertices tried)"


def _labelled(claim: _Claim, rules: Rules[Any]) -> str:
    """What must be chosen stays in the graph, and weighs more."""
    place = ordered(claim.columns, ~claim.pins.never)
    bags = bags_of(rows_of(claim.edges, place, filled(claim.columns, claim.edges, place)))
    must = int(claim.pins.must.sum())
    weights = np.where(claim.pins.never, 0, claim.weights)
    extra = extra_weight(weights, must, rules.q)
    weights = weights + np.where(claim.pins.must, extra, 0)
    program = Program(bags, _by_place(place, weights), rules)
    proven = program.best() - extra * must
    return claim.words(proven, f"an order with {len(bags.members)} bags, {program.states} states tried")


def _by_place(place: Ints, weights: Ints) -> Ints:
    found = np.zeros(int((place >= 0).sum()), np.int64)
    found[place[place >= 0]] = weights[place >= 0]
    return found
