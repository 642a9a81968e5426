"""The checker confirms right answers and finds every single fault put into one."""

from __future__ import annotations

import hashlib
import itertools
from dataclasses import replace

import nearchord
import networkx
import numpy as np
import pytest
from nearchord import (
    Answer,
    Budget,
    CheckFailed,
    Graph,
    IndependentSet,
    ProofKind,
    Provenance,
    Verdict,
    VertexCover,
    check,
)
from nearchord.stages import WhenOver

PATH = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3)], weights=[3, 1, 4, 1], names=["a", "b", "c", "d"])


def answer(graph, question, chosen, value, bound=None, verdict=Verdict.PROVEN):
    """An answer as a session would give it."""
    weights = "" if graph.weights is None else hashlib.sha256(graph.weights.astype("<i8").tobytes()).hexdigest()
    provenance = Provenance(graph.address, weights, "1", 0, Budget(), WhenOver.BOUND, 1, (), 0.0, 0.0, 0, None)
    return Answer(
        job_id="j",
        batch_index=0,
        label="",
        question=question,
        verdict=verdict,
        value=value,
        bound=value if bound is None else bound,
        chosen=np.array(chosen, np.uint32),
        reason="said",
        fill=None,
        fill_lower_bound=None,
        states=None,
        bags=None,
        largest_bag=None,
        parts=None,
        fill_cores=None,
        proof=ProofKind.NONE,
        proof_kinds=(),
        seconds=0.0,
        vertices=graph.n,
        names_address="",
        provenance=provenance,
    )


def test_a_right_answer_is_confirmed_but_for_its_bound():
    """Choice and value are confirmed; the bound would take a proof, and the checker says so."""
    confirmed = check(PATH, answer(PATH, IndependentSet(), [0, 2], 7))
    assert confirmed.what == ("no edge lies inside the 2 chosen vertices", "the chosen vertices weigh 7")
    assert confirmed.not_confirmed == ("the bound 7: the answer carries no proof of it",)
    confirmed = check(PATH, answer(PATH, VertexCover(), [1, 3], 2))
    assert confirmed.what[0] == "the 2 chosen vertices touch all 3 edges"


@pytest.mark.parametrize(
    ("proof", "words"),
    [
        ("certificate", "its proof is not at hand; `solve --proof FILE` writes it, `check --proof FILE` reads it"),
        ("search", "it rests on a search, which leaves no proof"),
        ("none", "the answer carries no proof of it"),
    ],
)
def test_a_bound_without_its_proof_stays_open_and_says_what_to_do(proof, words):
    """An answer whose certificate was left behind says where to get it."""
    given = replace(answer(PATH, IndependentSet(), [0, 2], 7), proof=ProofKind(proof))
    assert check(PATH, given).not_confirmed == (f"the bound 7: {words}",)


def test_plain_bounds_are_confirmed():
    """Where all vertices are chosen, or only those that must be, no proof is needed."""
    free = Graph.from_edges(3, [], weights=[1, 2, 3])
    assert check(free, answer(free, IndependentSet(never=[0]), [1, 2], 5)).not_confirmed == ()
    assert check(free, answer(free, VertexCover(must=[1]), [1], 2)).not_confirmed == ()
    empty = Graph.from_edges(0, [])
    assert check(empty, answer(empty, IndependentSet(), [], 0)).not_confirmed == ()


@pytest.mark.parametrize(
    ("question", "chosen", "value", "bound", "verdict", "message"),
    [
        (IndependentSet(), [0, 1], 4, 4, "PROVEN", "the chosen set has the edge {a, b} inside"),
        (VertexCover(), [1], 1, 1, "PROVEN", "the chosen set does not touch the edge {c, d}"),
        (IndependentSet(), [0, 2], 8, 8, "PROVEN", "the value is given as 8, but the chosen vertices weigh 7"),
        (IndependentSet(), [0, 4], 3, 3, "PROVEN", "vertex 4 is chosen, but the graph has 4 vertices"),
        (IndependentSet(), [2, 0], 7, 7, "PROVEN", "the chosen vertices do not ascend at vertex a"),
        (IndependentSet(), [0, 0], 6, 6, "PROVEN", "the chosen vertices do not ascend at vertex a"),
        (IndependentSet(must=[1]), [0, 2], 7, 7, "PROVEN", "vertex b must be chosen, but is not"),
        (IndependentSet(never=["c"]), [0, 2], 7, 7, "PROVEN", "vertex c must not be chosen, but is"),
        (IndependentSet(must=[7]), [0, 2], 7, 7, "PROVEN", "must has vertex 7, but the graph has 4 vertices"),
        (IndependentSet(), [0], 3, 7, "PROVEN", "the verdict is PROVEN, but the bound 7 is not the value 3"),
        (IndependentSet(), [0, 2], 7, 6, "BOUNDED", "the bound 6 contradicts the value 7"),
        (VertexCover(), [1, 3], 2, 3, "BOUNDED", "the bound 3 contradicts the value 2"),
        (IndependentSet(), [], None, 7, "PROVEN", "the verdict is PROVEN, but there is no value"),
        (IndependentSet(), [0], None, None, "BROKEN", "1 vertices are chosen, but there is no value"),
        (
            IndependentSet(must=[0], never=[1]),
            [],
            None,
            None,
            "INFEASIBLE",
            "the verdict is INFEASIBLE, but the pins do not contradict each other",
        ),
    ],
)
def test_every_fault_is_found_and_named(question, chosen, value, bound, verdict, message):
    """One fault at a time."""
    given = replace(answer(PATH, question, chosen, value, bound, Verdict(verdict)), bound=bound)
    with pytest.raises(CheckFailed) as caught:
        check(PATH, given)
    assert str(caught.value) == message
    assert caught.value.reason == "CHECK_FAILED"


def test_a_missing_bound_is_found():
    """An answer with a value has a bound."""
    with pytest.raises(CheckFailed, match="there is no bound"):
        check(PATH, replace(answer(PATH, IndependentSet(), [0, 2], 7), bound=None))


def test_an_answer_about_something_else_is_found():
    """Graph and weights have to be those of the answer; unit weights may be left out or written down."""
    given = answer(PATH, IndependentSet(), [0, 2], 7)
    with pytest.raises(CheckFailed, match="is about the graph"):
        check(Graph.from_edges(4, []), given)
    with pytest.raises(CheckFailed, match="is about the weights"):
        check(PATH.with_weights([3, 2, 4, 1]), given)
    with pytest.raises(CheckFailed, match="is about the weights"):
        check(PATH.with_weights(None), given)
    ones = PATH.with_weights([1, 1, 1, 1])
    check(ones, answer(PATH.with_weights(None), IndependentSet(), [0, 2], 2))
    check(PATH.with_weights(None), answer(ones, IndependentSet(), [0, 2], 2))


@pytest.mark.parametrize(
    ("question", "what"),
    [
        (IndependentSet(must=[0, "b"]), "the pins contradict each other at the edge {a, b}"),
        (VertexCover(never=[3, 2]), "the pins contradict each other at the edge {c, d}"),
        (VertexCover(must=[0], never=[0]), "the pins contradict each other: vertex a is in both lists"),
    ],
)
def test_contradicting_pins_are_confirmed(question, what):
    """INFEASIBLE needs no proof: the place of the contradiction is shown."""
    given = replace(answer(PATH, question, [], None, None, Verdict.INFEASIBLE), bound=None)
    assert check(PATH, given) == nearchord.Confirmed((what,), ())


@pytest.mark.parametrize("verdict", ["CANCELLED", "EXPIRED", "BROKEN", "OVER_FILL"])
def test_jobs_without_an_answer_confirm_nothing(verdict):
    """There is nothing to check, and the checker says so."""
    given = replace(answer(PATH, IndependentSet(), [], None, None, Verdict(verdict)), bound=None)
    confirmed = check(PATH, given)
    assert confirmed.what == ()
    assert confirmed.not_confirmed == (f"anything: the job ended {verdict} without an answer",)


def test_the_checker_agrees_with_the_definition_on_small_graphs():
    """Every subset of every graph of networkx's atlas on up to five vertices: accepted if and only if it is right."""
    for source in networkx.graph_atlas_g():
        if source.number_of_nodes() > 5:
            break
        graph = Graph.from_networkx(source, weight=None)
        for size in range(graph.n + 1):
            for chosen in itertools.combinations(range(graph.n), size):
                independent = not any(source.has_edge(u, v) for u, v in itertools.combinations(chosen, 2))
                cover = all(u in chosen or v in chosen for u, v in source.edges)
                assert accepted(graph, answer(graph, IndependentSet(), chosen, size)) is independent
                assert accepted(graph, answer(graph, VertexCover(), chosen, size)) is cover


def accepted(graph, given):
    try:
        check(graph, given)
    except CheckFailed:
        return False
    return True
