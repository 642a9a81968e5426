"""Proofs by an elimination order that are no proofs: each is refused with words that name the place."""

from __future__ import annotations

from dataclasses import replace

import nearchord
import numpy as np
import pytest
from certified import answered, bounded, nothing_chosen, verdict_on
from elimination import columns_of
from nearchord import Clique, ColourableSubgraph, Graph, IndependentSet, InducedForest
from nearchord.checks import cliques, elimination, labelled

# a square with a chord missing, and a triangle on one of its corners
HOUSE = Graph.from_edges(6, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (3, 5), (4, 5)], weights=[3, 4, 5, 6, 7, 8])
ORDER = [4, 5, 0, 1, 2, 3]
WHOLE = columns_of(ORDER, [(1, 3)])
KINDS = (ColourableSubgraph(colours=2), ColourableSubgraph(colours=3), InducedForest())


def claim(question: nearchord.Choice, bound: int, **columns: object) -> nearchord.Answer:
    """An answer that chooses what it must and claims a bound."""
    bare = replace(answered(HOUSE, IndependentSet()), question=question, columns={})
    chosen = np.array(sorted(question.must), np.uint32)
    colours = {"colour": np.ones(chosen.size, np.uint32)} if isinstance(question, ColourableSubgraph) else {}
    given = nothing_chosen(bare, bound, **columns, **colours)
    return replace(given, chosen=chosen, value=int(HOUSE.weights[chosen].sum()))


def test_an_order_and_its_fill_prove_the_optimum() -> None:
    """Two colours, and a forest, leave out the corner of the square that is in the triangle."""
    for question, best in ((KINDS[0], 27), (KINDS[2], 27)):
        assert verdict_on(HOUSE, claim(question, best, **WHOLE)) == "confirmed"
        with pytest.raises(nearchord.CheckFailed, match=f"is given as {best - 1}, but the proof comes to {best}"):
            nearchord.check(HOUSE, claim(question, best - 1, **WHOLE))


def test_any_order_proves_the_heaviest_clique() -> None:
    """The triangle, whatever goes first; a bound below it is refuted by naming it."""
    for order in (ORDER, [0, 1, 2, 3, 4, 5], [3, 0, 2, 5, 1, 4]):
        proof = {"proof_order": np.array(order, np.uint32)}
        assert verdict_on(HOUSE, claim(Clique(), 21, **proof)) == "confirmed"
        with pytest.raises(nearchord.CheckFailed, match=r"the clique \{3, 4, 5\} makes more possible"):
            nearchord.check(HOUSE, claim(Clique(), 20, **proof))


def test_pins_decide_which_vertices_the_order_has() -> None:
    """What may not be chosen is not in it; for cliques nor is what must be, and what is not joined to all of that."""
    left = {"proof_order": np.array([4, 5], np.uint32)}
    assert verdict_on(HOUSE, claim(Clique(must=(3,), never=(0, 2)), 21, **left)) == "confirmed"
    assert verdict_on(HOUSE, claim(Clique(must=(3,)), 21, **left)) == "refused"
    pinned = InducedForest(must=(3, 4), never=(5,))
    assert verdict_on(HOUSE, claim(pinned, 22, **columns_of([4, 0, 1, 2, 3], [(1, 3)]))) == "confirmed"
    assert verdict_on(HOUSE, claim(pinned, 21, **columns_of([4, 0, 1, 2, 3], [(1, 3)]))) == "refused"


MALFORMED = {
    "the order of the proof has vertex 5 twice": columns_of([4, 5, 0, 1, 2, 3, 5], [(1, 3)]),
    "the order of the proof lacks vertex 3": columns_of([4, 5, 0, 1, 2], [(1, 2)]),
    "the proof has vertex 6, but the graph has 6 vertices": columns_of([4, 5, 0, 1, 2, 3, 6], [(1, 3)]),
    "the proof has vertex 9, but": columns_of(ORDER, [(1, 9)]),
    "the proof lacks fill: the vertices at places 3 and 5": columns_of(ORDER, []),
    "pair 0 that the proof fills is an edge of the graph": columns_of(ORDER, [(0, 1), (1, 3)]),
    "pair 0 that the proof fills stands twice": columns_of(ORDER, [(1, 3), (1, 3)]),
    "pair 1 that the proof fills does not have its smaller end first": columns_of(ORDER, [(1, 3), (4, 0)]),
    "the last pair that the proof fills has one end": {**WHOLE, "proof_fill": np.array([1, 3, 4], np.uint32)},
    "no column proof_fill of one dimension and type uint32": {"proof_order": WHOLE["proof_order"]},
    "no column proof_order of one dimension": {**WHOLE, "proof_order": np.array(ORDER, np.int64)},
}


@pytest.mark.parametrize("message", MALFORMED)
@pytest.mark.parametrize("question", KINDS, ids=str)
def test_what_is_no_order_is_refused(question: nearchord.Choice, message: str) -> None:
    """Whatever bound below the trivial one it is to prove."""
    with pytest.raises(nearchord.CheckFailed, match=message):
        nearchord.check(HOUSE, claim(question, 32, **MALFORMED[message]))


@pytest.mark.parametrize("message", list(MALFORMED)[:3])
def test_what_is_no_order_proves_nothing_about_cliques(message: str) -> None:
    with pytest.raises(nearchord.CheckFailed, match=message):
        nearchord.check(HOUSE, claim(Clique(), 32, **MALFORMED[message]))


def test_vertices_that_pins_decide_have_no_place_in_the_order() -> None:
    """A pair with such a vertex is refused as well."""
    forest = InducedForest(never=(5,))
    with pytest.raises(nearchord.CheckFailed, match="has vertex 5, which the pins decide"):
        nearchord.check(HOUSE, claim(forest, 20, **WHOLE))
    with pytest.raises(nearchord.CheckFailed, match="pair 1 that the proof fills has a vertex that the pins decide"):
        nearchord.check(HOUSE, claim(forest, 20, **columns_of([4, 0, 1, 2, 3], [(1, 3), (0, 5)])))


def test_a_proof_for_another_question_proves_nothing() -> None:
    """A split of the weights bounds independent sets, an order says nothing about them."""
    split = {name: column for name, column in answered(HOUSE).columns.items() if name.startswith("proof_")}
    heaviest = answered(HOUSE).bound
    assert verdict_on(HOUSE, claim(IndependentSet(), heaviest, **split)) == "confirmed"
    assert verdict_on(HOUSE, claim(IndependentSet(), heaviest, **WHOLE)) == "open"
    for question in (*KINDS, Clique()):
        assert verdict_on(HOUSE, claim(question, heaviest, **split)) == "open", question


def test_a_proof_for_another_graph_is_refused() -> None:
    """With an edge more, the same order needs fill that the proof does not have."""
    u, v = HOUSE.edges()
    other = Graph.from_arrays(6, np.append(u, 0), np.append(v, 4), weights=HOUSE.weights)
    bare = replace(answered(other), question=InducedForest(), columns={})
    with pytest.raises(nearchord.CheckFailed, match="lacks fill"):
        nearchord.check(other, nothing_chosen(bare, 30, **WHOLE))
    with pytest.raises(nearchord.CheckFailed, match="not about this one"):
        nearchord.check(other, claim(InducedForest(), 30, **WHOLE))


@pytest.mark.parametrize(
    ("module", "limit", "question"),
    [
        (labelled, "MOST_STATES", KINDS[0]),
        (labelled, "MOST_STATES", KINDS[2]),
        (labelled, "MOST_CELLS", KINDS[0]),
        (labelled, "MOST_CELLS_OF_BAG", KINDS[1]),
        (labelled, "MOST_CELLS_KEPT", KINDS[2]),
        (elimination, "MOST_FILLED", KINDS[2]),
        (cliques, "MOST_STATES", Clique()),
        (cliques, "MOST_LOOKS", Clique()),
    ],
)
def test_what_takes_too_long_is_left_open(
    monkeypatch: pytest.MonkeyPatch, module: object, limit: str, question: nearchord.Choice
) -> None:
    """The checker has limits of its own, and says so."""
    monkeypatch.setattr(module, limit, 0)
    (left,) = nearchord.check(HOUSE, claim(question, 20, **WHOLE)).not_confirmed
    assert "take too long" in left


def test_weights_beyond_the_numbers_of_the_checker_are_left_open() -> None:
    """With four colours, worths of sets are sums of eight values."""
    graph = Graph.from_edges(6, [(u, v) for v in range(6) for u in range(v)], weights=[2**58] * 6)
    answer = answered(graph, ColourableSubgraph(colours=4))
    assert (answer.verdict, answer.proof) == (nearchord.Verdict.PROVEN, nearchord.ProofKind.SEARCH)
    proof = columns_of(range(6), [])
    (left,) = nearchord.check(graph, nothing_chosen(answer, 2**60, **proof)).not_confirmed
    assert "larger than this client computes with" in left
    two = answered(graph, ColourableSubgraph(colours=2))
    assert verdict_on(graph, nothing_chosen(two, 2**59, **proof)) == "confirmed"
    assert verdict_on(graph, nothing_chosen(two, 2**59 - 1, **proof)) == "refused"
    pinned = replace(two, question=ColourableSubgraph(must=tuple(two.chosen.tolist()), colours=2))
    (left,) = nearchord.check(graph, bounded(pinned, 2**59 + 1, **proof)).not_confirmed
    assert "larger than this client computes with" in left
