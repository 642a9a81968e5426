"""The checker on fills: every small graph is confirmed from its witnesses, and every fault put into one is found."""

from __future__ import annotations

import inspect
import re
from dataclasses import replace
from itertools import combinations, permutations
from pathlib import Path

import networkx as nx
import numpy as np
import pytest
from add_on_answers import choice_answer
from definition import least_fill, networkx_graph
from fill_answers import (
    consecutive_cliques,
    cut,
    fill_answer,
    is_chordless,
    is_consecutive,
    least_edits,
    provenance,
    split_clique,
    vertices,
)
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord import CheckFailed, ColourableSubgraph, Graph, IndependentSet, ProofKind, Recognition, Verdict, check
from nearchord.checks import splitting
from nearchord.checks.chordal import check_chordless_cycle, check_elimination_order
from nearchord.checks.classes import check_cliques, check_split, splittance
from nearchord.checks.edges import Edges
from nearchord.checks.packing import MOST_PAIRS, Packing
from strategies import arbitrary_graphs

SQUARE = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)], names=["a", "b", "c", "d"])
TWO_SQUARES = Graph.from_edges(7, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (4, 5), (5, 6), (3, 6)])


def atlas(most):
    """Every graph on one to `most` vertices."""
    for source in nx.graph_atlas_g()[1:]:
        if source.number_of_nodes() > most:
            break
        yield source


def ours(source):
    return Graph.from_edges(source.number_of_nodes(), [tuple(sorted(edge)) for edge in source.edges])


def edges_of(graph):
    return Edges(graph.n, *graph.edges())


def passes(test, *arguments):
    try:
        test(*arguments)
    except CheckFailed:
        return False
    return True


def ints(values):
    return np.array(values, np.int64)


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
        "adding the 1 fill edges makes the graph chordal",
        "the graph is not chordal: a cycle on 4 vertices has no chord",
        "the graph is not interval, because it is not chordal",
        "the graph is not split: its splittance is 1",
        "the bound 1: rings of the packing need as many fill edges",
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
            "the value is given as 2, but 1 fill edges are named",
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
            "the value is given as 2, but 1 fill edges are named",
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


def packing(cycles, numerators=None, denominators=None):
    return rings([[[v] for v in cycle] for cycle in cycles], numerators, denominators)


def rings(found, numerators=None, denominators=None):
    group, vertex = cut([group for ring in found for group in ring])
    return {
        "packing_ring": np.cumsum([0, *map(len, found)]).astype(np.int64),
        "packing_group": group,
        "packing_vertex": vertex,
        "packing_numerator": ints(numerators or [1] * len(found)),
        "packing_denominator": ints(denominators or [1] * len(found)),
    }


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


def test_cycles_with_a_common_pair_share_it():
    """In K(2, 3) all three squares have the pair {0, 1}: thirds give 1, and so do halves and wholes, as what
    is above 1 is taken off."""
    graph = Graph.from_edges(5, [(u, v) for u in (0, 1) for v in (2, 3, 4)])
    squares = [[0, 2, 1, 3], [0, 2, 1, 4], [0, 3, 1, 4]]
    assert Packing(graph, packing(squares, [1, 1, 1], [3, 3, 3])).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [1, 1, 1], [4, 4, 4])).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [1, 1, 1], [9, 9, 9])).bound(edges_of(graph)) == 1
    for numerators, denominators in ([1, 1, 1], [2, 2, 2]), ([1, 1, 1], [1, 1, 1]), ([3, 2, 0], [2, 2, 1]):
        assert Packing(graph, packing(squares, numerators, denominators)).bound(edges_of(graph)) == 1


def test_a_common_side_is_no_common_pair():
    """Two squares of a ladder share an edge, which neither can use: whole shares pass, wherever the cycles begin."""
    ladder = Graph.from_edges(6, [(0, 1), (2, 3), (4, 5), (0, 2), (2, 4), (1, 3), (3, 5)])
    for first in ([2, 0, 1, 3], [0, 1, 3, 2], [3, 2, 0, 1]):
        for second in ([2, 4, 5, 3], [4, 5, 3, 2], [3, 2, 4, 5]):
            assert Packing(ladder, packing([first, second])).bound(edges_of(ladder)) == 2


def test_shares_are_exact_whatever_their_denominators():
    """Denominators whose common multiple leaves 64 bits."""
    primes = [2**31 - 1, 2**61 - 1, 2**17 - 1]
    graph = Graph.from_edges(5, [(u, v) for u in (0, 1) for v in (2, 3, 4)])
    squares = [[0, 2, 1, 3], [0, 2, 1, 4], [0, 3, 1, 4]]
    assert Packing(graph, packing(squares, [1, 1, 1], primes)).bound(edges_of(graph)) == 1
    assert Packing(graph, packing(squares, [2**31 - 1, 1, 0], primes)).bound(edges_of(graph)) == 1


def test_long_cycles_cost_no_pairs():
    """A cycle of 30,000 vertices has more pairs than may be looked at, but shares none of them."""
    n = 30_000
    assert n * (n - 3) // 2 > MOST_PAIRS
    graph = Graph.from_arrays(n, np.arange(n), np.roll(np.arange(n), -1))
    assert Packing(graph, packing([list(range(n))])).bound(edges_of(graph)) == n - 3


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


def test_elimination_orders_pass_exactly_when_later_neighbours_are_adjacent():
    """Every order of every graph on up to five vertices, against the definition."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        for order in permutations(range(graph.n)):
            at = {v: i for i, v in enumerate(order)}
            later = {v: [w for w in source[v] if at[w] > at[v]] for v in source}
            right = all(source.has_edge(*pair) for found in later.values() for pair in combinations(found, 2))
            assert passes(check_elimination_order, graph, edges, ints(order)) is right


def test_cycles_pass_exactly_when_they_have_no_chord():
    """Every sequence of different vertices of every graph on up to five."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        for length in range(3, graph.n + 1):
            for cycle in permutations(range(graph.n), length):
                assert passes(check_chordless_cycle, graph, edges, ints(cycle)) is is_chordless(source, cycle)


def test_clique_lists_pass_exactly_when_they_are_all_maximal_cliques_in_consecutive_order():
    """Every order of the maximal cliques of small graphs; with one left out, enlarged, or repeated, none passes."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        cliques = [sorted(clique) for clique in nx.find_cliques(source)]
        for order in permutations(cliques):
            assert passes(check_cliques, graph, edges, *listed(order)) is is_consecutive(order)
        consecutive = consecutive_cliques(source)
        for wrong in [] if consecutive is None else spoilt(consecutive, graph.n):
            assert not passes(check_cliques, graph, edges, *listed(wrong)), wrong


def listed(lists):
    start, vertex = cut(lists)
    return start, vertex.astype(np.int64)


def spoilt(cliques, n):
    for i, clique in enumerate(cliques):
        yield [*cliques[:i], *cliques[i + 1 :]]
        yield [*cliques[:i], clique, *cliques[i:]]
        yield [*cliques[:i], clique[:1], *cliques[i:]]
        for v in set(range(n)) - set(clique):
            yield [*cliques[:i], [*clique, v], *cliques[i + 1 :]]


def test_partitions_pass_exactly_when_they_are_split():
    """Every set of vertices of every graph on up to five."""
    for source in atlas(5):
        graph = ours(source)
        edges = edges_of(graph)
        accepted = [
            clique
            for size in range(graph.n + 1)
            for clique in combinations(range(graph.n), size)
            if passes(check_split, graph, edges, ints(clique))
        ]
        for clique in accepted:
            assert all(source.has_edge(*pair) for pair in combinations(clique, 2))
            assert not source.subgraph(set(source) - set(clique)).edges
        assert bool(accepted) is (split_clique(source) is not None)


def test_the_splittance_is_the_least_number_of_edits():
    """The formula of the degrees against all choices of a clique."""
    for source in atlas(6):
        assert splittance(edges_of(ours(source))) == least_edits(source)


@settings(deadline=None, max_examples=100)
@given(drawn=arbitrary_graphs(7), data=st.data())
def test_no_packing_proves_more_than_the_least_fill(drawn, data):
    """Whatever rings and shares, open sides and large groups too: what passes is a bound."""
    n, pairs = drawn
    graph = Graph.from_edges(n, pairs)
    found = list(all_rings(networkx_graph(n, pairs)))
    if not found:
        return
    taken = data.draw(st.lists(st.sampled_from(found), min_size=1, max_size=8))
    denominator = data.draw(st.integers(1, 4))
    numerators = [data.draw(st.integers(0, 2 * denominator)) for _ in taken]
    bound = Packing(graph, rings(taken, numerators, [denominator] * len(taken))).bound(edges_of(graph))
    assert bound <= least_fill(n, pairs)


def all_rings(source):
    """Rings of single vertices in which at most two sides are open, and what twins make of them."""
    for length in range(4, len(source) + 1):
        for corners in permutations(sorted(source), length):
            if corners[0] != min(corners) or corners[1] > corners[-1]:
                continue
            steps = [
                (j - i in (1, length - 1), source.has_edge(corners[i], corners[j]))
                for i, j in combinations(range(length), 2)
            ]
            if (False, True) in steps or steps.count((True, False)) > 2:
                continue
            yield [[v] for v in corners]
            groups = [[v] for v in corners]
            for v in set(source) - set(corners):
                at = [i for i, corner in enumerate(corners) if set(source[v]) - {corner} == set(source[corner]) - {v}]
                if at:
                    groups[at[0]].append(v)
            if any(len(group) > 1 for group in groups):
                yield groups


def test_groups_stand_for_all_their_cycles():
    """Four groups of two, neighbours joined: every fill of it makes two opposite groups a clique to each other."""
    graph = Graph.from_edges(
        8, [(u, v) for u in range(8) for v in range(u) if u // 2 != v // 2 and (u // 2 - v // 2) % 2]
    )
    four = [[0, 1], [2, 3], [4, 5], [6, 7]]
    assert Packing(graph, rings([four], [4])).bound(edges_of(graph)) == 4
    assert Packing(graph, rings([four], [5])).bound(edges_of(graph)) == 3


def test_open_sides_take_their_part_of_a_load():
    """The pentagon cut at a chord: a square that pays for its open side with the load of a cycle that pays for it."""
    pentagon = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)])
    opened = rings([[[v] for v in range(5)], [[0], [2], [3], [4]]], [1, 1])
    assert Packing(pentagon, opened).bound(edges_of(pentagon)) == 0 + 2 - 2
    partly = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (0, 3)])
    with pytest.raises(CheckFailed, match="group 0 of ring 0 of the packing is neither joined to the next one"):
        Packing(partly, rings([[[0], [1, 4], [2], [3]]])).bound(edges_of(partly))


def test_the_contract_names_every_column_that_is_checked():
    """The names here are those of the wire contract."""
    names = set(fill_answer(SQUARE).columns) | set(fill_answer(Graph.from_edges(3, [(0, 1), (1, 2)])).columns)
    names |= {f"proof_{name}" for name in splitting.TYPES}
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
