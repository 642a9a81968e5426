"""The checker on fills: every small graph is confirmed from its witnesses, and every fault put into one is found."""

from __future__ import annotations

import inspect
import re
from dataclasses import replace
from pathlib import Path

import pytest
from add_on_answers import choice_answer
from fill_answers import (
    fill_answer,
    provenance,
    vertices,
)
from fill_columns import atlas, branches, edges_of, ints, ours, packing
from nearchord import CheckFailed, ColourableSubgraph, Graph, IndependentSet, ProofKind, Recognition, Verdict, check
from nearchord.checks import splitting
from nearchord.checks.classes import splittance
from nearchord.checks.packing import Packing

SQUARE = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)], names=["a", "b", "c", "d"])
TWO_SQUARES = Graph.from_edges(7, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (4, 5), (5, 6), (3, 6)])


def test_every_small_graph_is_confirmed_as_far_as_its_witnesses_go():
    """Only a bound that rests on search, and the absence of intervals in chordal graphs, stay open."""
    for source in atlas(5):
        graph = ours(source)
        answer = fill_answer(graph)
        confirmed = check(graph, answer)
        left = [word.split(":")[0] for word in confirmed.not_confirmed]
        searched = ProofKind.SEARCH in answer.proof_kinds
        odd = answer.recognition.chordal and not answer.recognition.interval
        assert left == ["that the graph is not interval"] * odd + [f"the bound {answer.bound}"] * searched
        assert len(confirmed.what) == 5 - len(left) - (answer.bound == 0)


def test_what_is_confirmed_is_said_in_words():
    """The square needs one edge, and one cycle shows it."""
    confirmed = check(SQUARE, fill_answer(SQUARE))
    assert confirmed.not_confirmed == ()
    assert confirmed.what == (
        "adding the 1 fill edge makes the graph chordal",
        "the graph is not chordal: a cycle on 4 vertices has no chord",
        "the graph is not interval, because it is not chordal",
        "the graph is not split: its splittance is 1",
        "the bound 1: rings of the packing need a fill edge",
    )


def changed(graph, column=None, to=None, **fields):
    """The right answer with one column or some fields changed; a column of None is left out."""
    answer = fill_answer(graph, **fields)
    if column is None:
        return answer
    columns = {**answer.columns, column: to}
    return replace(answer, columns={name: value for name, value in columns.items() if value is not None})


def square(*arguments, **fields):
    return SQUARE, changed(SQUARE, *arguments, **fields)


def said(**classes):
    return square(recognition=replace(Recognition(False, False, False, 1), **classes))


PATH = Graph.from_edges(3, [(0, 1), (1, 2)])


def path(*arguments, **fields):
    return PATH, changed(PATH, *arguments, **fields)


@pytest.mark.parametrize(
    ("case", "message"),
    [
        (square(chosen=vertices([0])), "1 vertices are chosen, but the question chooses none"),
        (square(value=None), "the verdict is PROVEN, but there is no value"),
        (square(value=2, bound=2), "fill is 1, but the value is 2"),
        (square(value=2, bound=2, fill=2), "fill_lower_bound is 1, but the bound is 2"),
        (
            square(value=2, bound=2, fill=2, fill_lower_bound=2),
            "the value is given as 2, but 1 fill edge is named",
        ),
        (square(bound=0, fill_lower_bound=0), "the verdict is PROVEN, but the bound 0 is not the value 1"),
        (square(bound=2, verdict=Verdict.BOUNDED), "the bound 2 contradicts the value 1"),
        (square("fill_edge", vertices([0, 1])), "the fill edge {a, b} is an edge of the graph"),
        (square("fill_edge", vertices([2, 0])), "the fill edges do not ascend at {c, a}"),
        (square("fill_edge", vertices([0, 4])), "a fill edge has vertex 4, but the graph has 4 vertices"),
        (
            square("elimination_order", vertices([1, 0, 2, 3])),
            "the fill edges do not make the graph chordal in the order given: a and c follow their neighbour b, "
            "but are not adjacent",
        ),
        (square("elimination_order", vertices([1, 3, 0])), "the elimination order is no order of the 4 vertices"),
        (square("elimination_order", vertices([1, 3, 0, 0])), "the elimination order is no order of the 4 vertices"),
        (square("elimination_order", vertices([1, 3, 0, 9])), "the elimination order is no order of the 4 vertices"),
        (square("chordless_cycle", vertices([0, 1, 2])), "the chordless cycle has 3 vertices, where it takes four"),
        (square("chordless_cycle", vertices([0, 1, 2, 1])), "the chordless cycle passes a vertex twice"),
        (square("chordless_cycle", vertices([0, 2, 1, 3])), "the chordless cycle has the chord {a, b}"),
        (square("chordless_cycle", vertices([0, 1, 2, 7])), "the chordless cycle has vertex 7, but the graph has 4"),
        (said(chordal=True), "the graph is said to be chordal, but a chordless cycle is named"),
        (said(interval=True), "the graph is said to be interval or split, but not chordal; both are always chordal"),
        (said(splittance=2), "the splittance is given as 2, but the degrees make it 1"),
        (said(chordal=None, split=True), "the graph is said to be split, but its splittance is 1"),
        (path("clique_start", ints([0, 2])), "the cliques are not cut into lists"),
        (path("clique_vertex", vertices([0, 1, 1, 1])), "the cliques that have vertex 1 are not consecutive"),
        (path("clique_vertex", vertices([1, 0, 0, 2])), "the edge {1, 2} lies in none of the cliques"),
        (
            square("fill_edge", vertices([1, 3, 1, 3]), value=2, bound=2, fill=2, fill_lower_bound=2),
            "the fill edges do not ascend at {b, d}",
        ),
        (path("split_clique", vertices([0])), "the edge {1, 2} lies outside the partition's clique"),
        (path("split_clique", vertices([0, 2])), "the 2 vertices of the partition's clique are not pairwise adjacent"),
        (
            square(bound=2, value=2, fill=2, fill_lower_bound=2, verdict=Verdict.OVER_FILL),
            "the value is given as 2, but 1 fill edge is named",
        ),
        (
            square(verdict=Verdict.OVER_FILL, provenance=provenance(SQUARE, 1)),
            "the verdict is OVER_FILL, but the bound 1 is not above the budget 1",
        ),
        (square("packing_ring", ints([0, 3])), "the rings of the packing are not cut into lists"),
        (square("packing_group", ints([0, 1, 2, 3])), "the groups of the packing are not cut into lists"),
        (square("packing_group", ints([0, 1, 1, 3, 4])), "the groups of the packing are not cut into lists"),
        (square("packing_vertex", vertices([0, 1, 2, 1])), "ring 0 of the packing passes a vertex twice"),
        (square("packing_vertex", vertices([0, 1, 3, 2])), "ring 0 of the packing has the chord"),
        (square("packing_numerator", ints([-1])), "a share of the packing is negative"),
        (square("packing_denominator", ints([0])), "or has a denominator below 1"),
        (square("packing_denominator", ints([1, 1])), "the packing has 1 rings, but not as many shares"),
    ],
)
def test_every_fault_of_a_fill_is_found_and_named(case, message):
    """One fault at a time."""
    graph, answer = case
    with pytest.raises(CheckFailed) as caught:
        check(graph, answer)
    assert message in str(caught.value)


def fill_answer_of_two_squares(**changes):
    """Two squares that share a vertex need two edges, in two groups of cycles."""
    columns = {
        "fill_edge": vertices([0, 2, 3, 5]),
        "elimination_order": vertices([1, 0, 2, 4, 6, 3, 5]),
        "chordless_cycle": vertices([0, 1, 2, 3]),
        **packing([[0, 1, 2, 3], [3, 4, 5, 6]]),
    }
    fields = {
        "value": 2,
        "bound": 2,
        "fill": 2,
        "fill_lower_bound": 2,
        "provenance": provenance(TWO_SQUARES),
        "columns": columns,
        "recognition": Recognition(False, False, False, splittance(edges_of(TWO_SQUARES))),
        "vertices": 7,
    }
    return replace(fill_answer(SQUARE), **{**fields, **changes})


def test_cycles_without_a_common_pair_add_up():
    """Shares of a half in each of two places are rounded up in each."""
    halves = packing([[0, 1, 2, 3], [3, 4, 5, 6]], [1, 1], [2, 2])
    assert Packing(TWO_SQUARES, halves).bound(edges_of(TWO_SQUARES)) == 2
    right = fill_answer_of_two_squares()
    assert check(TWO_SQUARES, replace(right, columns={**right.columns, **halves})).not_confirmed == ()


def test_a_packing_too_large_to_be_checked_is_left_open(monkeypatch):
    """Neither confirmed nor refused."""
    monkeypatch.setattr("nearchord.checks.packing.MOST_PAIRS", 3)
    answer = fill_answer(SQUARE)
    twice = packing([[0, 1, 2, 3]] * 2, [1, 1], [2, 2])
    confirmed = check(SQUARE, replace(answer, columns={**answer.columns, **twice}))
    assert confirmed.not_confirmed == ("the bound 1: the packing is too large to be checked here",)


@pytest.mark.parametrize(
    ("kinds", "rest"),
    [
        ((ProofKind.PACKING, ProofKind.BRANCH), "rests on branch"),
        ((ProofKind.SEARCH, ProofKind.BRANCH), "rests on branch and search"),
        ((ProofKind.PACKING, ProofKind.PACKING), "has no witness in the answer"),
        ((ProofKind.PACKING, ProofKind.NONE), "has no witness in the answer"),
    ],
)
def test_bounds_beyond_the_packing_are_open_and_say_what_they_rest_on(kinds, rest):
    """Calling a core's proof a packing does not make up for a packing that is not there."""
    answer = replace(fill_answer_of_two_squares(), proof_kinds=kinds)
    answer = replace(answer, columns={**answer.columns, **packing([[0, 1, 2, 3]])})
    assert check(TWO_SQUARES, answer).not_confirmed == (
        f"the bound 2: the packing proves 1 of it, what is missing {rest}",
    )


@pytest.mark.parametrize("value", [None, 2])
def test_too_small_a_budget_is_confirmed_from_the_packing(value):
    """OVER_FILL needs no fill edges, only the bound."""
    verdict, origin = Verdict.OVER_FILL, provenance(TWO_SQUARES, 1)
    confirmed = check(TWO_SQUARES, fill_answer_of_two_squares(verdict=verdict, provenance=origin, value=value))
    assert confirmed.not_confirmed == ()
    assert confirmed.what[-1] == "the bound 2: rings of the packing need as many fill edges"


def test_missing_witnesses_are_named_not_refused():
    """An answer that ran out of time says less."""
    answer = fill_answer(SQUARE, verdict=Verdict.BOUNDED, bound=0, fill_lower_bound=0, proof_kinds=())
    bare = replace(answer, columns={"fill_edge": answer.columns["fill_edge"]})
    assert [word.split(":")[0] for word in check(SQUARE, bare).not_confirmed] == [
        "that the fill edges make the graph chordal",
        "that the graph is not chordal",
        "that the graph is not interval",
    ]
    lost = replace(bare, columns={}, value=None, recognition=None, fill=None)
    assert check(SQUARE, lost).not_confirmed == ("how the graph becomes chordal: the answer names no fill edges",)


@pytest.mark.parametrize("verdict", ["CANCELLED", "EXPIRED", "BROKEN"])
def test_fills_that_never_ended_confirm_nothing(verdict):
    """As with every other question."""
    answer = fill_answer(SQUARE, verdict=Verdict(verdict), value=None, bound=None)
    assert check(SQUARE, answer).what == ()


def test_a_fill_does_not_ask_for_weights():
    """The question is about the graph alone."""
    assert check(SQUARE.with_weights([3, 1, 4, 1]), fill_answer(SQUARE)).not_confirmed == ()


def test_the_contract_names_every_column_that_is_checked():
    """The names here are those of the wire contract."""
    names = set(fill_answer(SQUARE).columns) | set(fill_answer(Graph.from_edges(3, [(0, 1), (1, 2)])).columns)
    names |= {f"proof_{name}" for name in splitting.TYPES} | set(branches([]))
    names |= set(choice_answer(SQUARE, IndependentSet(prices=True, conflict_prices=True, best=2)).columns)
    names |= set(choice_answer(SQUARE, ColourableSubgraph(scenarios=[[1] * 4])).columns)
    assert names | _OF_PLANS | {"chosen", "proof_order", "proof_fill"} == nearchord_columns()


_OF_PLANS = {
    "colour_start",
    *(f"share_{part}" for part in ("start", "vertex", "numerator", "denominator")),
    *(f"bottleneck_{part}" for part in ("numerator", "denominator")),
    "proof_clique",
}


def nearchord_columns():
    text = (Path(__file__).parents[3] / "proto" / "nearchord" / "v1" / "answer.proto").read_text(encoding="utf-8")
    named = re.findall(r"((?:`\w+` and )?`\w+`) \((?:UINT32|INT64)[,)]", text.replace("\n// ", " "))
    return {name for names in named for name in re.findall(r"\w{4,}", names)}


def test_the_checker_of_fills_uses_nothing_of_the_solver():
    """It is what tells a wrong solver."""
    folder = Path(inspect.getfile(Packing)).parent
    sources = list(folder.glob("*.py"))
    assert len(sources) >= 8
    for source in sources:
        assert "nearchord_solve" not in source.read_text(encoding="utf-8")
