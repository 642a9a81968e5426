"""Trees of cases: every leaf is worked out from the graph, and whatever is changed never proves more than is needed."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import networkx as nx
import numpy as np
import pytest
from certified import answered
from definition import least_fill, networkx_graph
from fill_answers import fill_answer, provenance
from fill_columns import all_rings, branches, edges_of, ints, ours, packing
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord import CheckFailed, Fill, Graph, ProofKind, Verdict, check
from nearchord.checks.branches import Branches
from nearchord.cli import witness
from nearchord.cli.names import Labels
from strategies import arbitrary_graphs

SQUARE = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)], names=["a", "b", "c", "d"])
TWO_SQUARES = Graph.from_edges(7, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (4, 5), (5, 6), (3, 6)])
NONE = ([], [])
RING = ([[[0], [1], [2], [3]]], [(1, 1)])
TREE = [(0, 2), NONE, RING]
SECOND = [(3, 5), NONE, ([[[3], [4], [5], [6]]], [(1, 1)])]


def bound(graph, columns, taken=()):
    return Branches(graph, columns).bound(edges_of(graph), ints(sorted(taken)))


def square(trees, **changes):
    """The answer about the square with trees instead of its packing."""
    answer = fill_answer(SQUARE, proof_kinds=(ProofKind.BRANCH,))
    kept = {name: column for name, column in answer.columns.items() if not name.startswith("packing")}
    return replace(answer, columns={**kept, **branches(trees), **changes})


def test_a_leaf_counts_what_was_decided_and_what_its_rings_need():
    """The square with its diagonal has it; without it, the cycle needs the other one."""
    assert bound(SQUARE, branches([TREE])) == 1
    assert bound(SQUARE, branches([[(0, 2), NONE, NONE]])) == 0
    assert bound(SQUARE, branches([[(0, 2), (1, 3), NONE, NONE, RING]])) == 1
    assert bound(SQUARE, branches([[RING]])) == 1
    confirmed = check(SQUARE, square([TREE]))
    assert confirmed.not_confirmed == ()
    assert confirmed.what[-1] == "the bound 1: rings of the packing with 1 tree of cases need a fill edge"


def test_a_pair_that_is_left_out_carries_any_load():
    """Where {0, 2} is not in the fill, {1, 3} is, however large the share: the square counts twice, less once."""
    for share, needed in ((1, 1), (2, 1), (5, 1)):
        assert bound(SQUARE, branches([[(0, 2), NONE, ([[[0], [1], [2], [3]]], [(share, 1)])]])) == needed
    assert bound(SQUARE, branches([[(0, 2), (1, 3), NONE, NONE, (1, 3), NONE, RING]])) == 1
    assert bound(SQUARE, branches([[(1, 3), RING, ([[[0], [1], [2], [3]]], [(3, 1)])]])) == 1


def test_a_pair_that_is_filled_pays_for_its_load():
    """It counts one less what the rings give it."""
    filled = ([[[0], [1], [2], [3]]], [(1, 2)])
    assert bound(SQUARE, branches([[(0, 2), filled, RING]])) == 1
    grid = Graph.from_edges(6, [(0, 1), (2, 3), (4, 5), (0, 2), (2, 4), (1, 3), (3, 5)])
    two = ([[[0], [1], [3], [2]], [[2], [3], [5], [4]]], [(1, 1), (1, 1)])
    assert bound(grid, branches([[(0, 3), two, two]])) == 2


def test_trees_about_different_pairs_add_up():
    """As many as the two squares need."""
    assert bound(TWO_SQUARES, branches([TREE, SECOND])) == 2
    with pytest.raises(CheckFailed, match=r"two branch trees, or one and the packing, speak of the pair {0, 2}"):
        bound(TWO_SQUARES, branches([TREE, TREE]))
    for other in ([(0, 2), NONE, NONE], [(0, 4), (0, 2), NONE, NONE, NONE]):
        with pytest.raises(CheckFailed, match=r"speak of the pair {0, 2}"):
            bound(TWO_SQUARES, branches([[(0, 2), NONE, NONE], other]))


def test_a_tree_and_a_packing_about_different_pairs_add_up():
    """And are refused where they speak of the same one, also where the ring is alone in its packing."""
    answer = fill_answer(SQUARE, value=2, bound=2, fill=2, fill_lower_bound=2, verdict=Verdict.OVER_FILL)
    answer = replace(answer, value=None, recognition=None, fill=None, provenance=provenance(TWO_SQUARES, 1), vertices=7)
    apart = replace(answer, columns={**packing([[3, 4, 5, 6]]), **branches([TREE])})
    assert check(TWO_SQUARES, apart).not_confirmed == ()
    for cycles in ([[0, 1, 2, 3]], [[3, 4, 5, 6], [0, 1, 2, 3]]):
        with pytest.raises(CheckFailed, match="speak of the pair"):
            check(TWO_SQUARES, replace(answer, columns={**packing(cycles), **branches([TREE])}))


def test_a_tree_that_proves_less_leaves_the_bound_open():
    """One case that does not reach the bound is enough; what is missing is said."""
    confirmed = check(SQUARE, square([[(0, 2), NONE, NONE]]))
    assert confirmed.not_confirmed == (
        "the bound 1: the packing with 1 tree of cases proves 0 of it, what is missing has no witness in the answer",
    )


@pytest.mark.parametrize("most", ["MOST_TERMS", "MOST_BITS"])
def test_trees_too_large_to_be_checked_are_left_open(monkeypatch, most):
    """Neither confirmed nor refused."""
    monkeypatch.setattr(f"nearchord.checks.branches.{most}", 0)
    confirmed = check(SQUARE, square([TREE]))
    assert confirmed.not_confirmed == ("the bound 1: the packing with 1 tree of cases is too large to be checked here",)


def test_many_decisions_are_too_much_without_a_ring(monkeypatch):
    """The way to a leaf counts as its rings do."""
    star = Graph.from_edges(9, [(0, v) for v in range(1, 9)])
    comb = [(1, v) for v in range(2, 9)]
    tree = [*comb, *[NONE] * (len(comb) + 1)]
    assert bound(star, branches([tree])) == 0
    monkeypatch.setattr("nearchord.checks.branches.MOST_TERMS", 10)
    answer = fill_answer(
        SQUARE, verdict=Verdict.OVER_FILL, provenance=provenance(star, 0), value=None, recognition=None
    )
    found = check(star, replace(answer, columns=branches([tree]), fill=None, vertices=9))
    assert "too large" in found.not_confirmed[-1]


@pytest.mark.parametrize(
    ("trees", "message"),
    [
        ([[(0, 1), NONE, RING]], "a branch tree decides {a, b}, which is an edge or does not ascend"),
        ([[(2, 0), NONE, RING]], "a branch tree decides {c, a}, which is an edge or does not ascend"),
        ([[(0, 2), NONE]], "branch tree 0 ends before its last case"),
        ([[(0, 2), NONE, RING, RING]], "branch tree 0 goes on after its last case"),
        ([[(0, 2), (0, 2), NONE, RING, RING]], "branch tree 0 decides {a, c} twice on the way to a leaf"),
        ([[(0, 2), NONE, (0, 2), NONE, RING]], "branch tree 0 decides {a, c} twice on the way to a leaf"),
        ([[(0, 9), NONE, RING]], "a branch tree has vertex 9, but the graph has 4 vertices"),
        ([[(0, 2), NONE, ([[[0], [2], [1], [3]]], [(1, 1)])]], "ring 0 of the branch trees has the chord"),
        ([[(0, 2), NONE, ([[[0], [1], [2], [3]]], [(-1, 1)])]], "a share of the branch trees is negative"),
        ([TREE, []], "the nodes of the branch trees are not cut into lists"),
    ],
)
def test_every_fault_of_a_tree_is_found_and_named(trees, message):
    """One at a time."""
    with pytest.raises(CheckFailed) as caught:
        check(SQUARE, square(trees))
    assert message in str(caught.value)


@pytest.mark.parametrize(
    ("column", "to", "message"),
    [
        ("branch_pair", [0, 2, 0, 0, 0], "the branch trees have a node with half a pair"),
        ("branch_leaf", [0, 1], "the branch trees have 2 leaves, but rings for 1"),
        ("branch_leaf", [0, 0, 0], "the 1 rings of the branch trees are not dealt to leaves one after the other"),
        ("branch_leaf", [0, 2, 1], "the 1 rings of the branch trees are not dealt to leaves one after the other"),
        ("branch_tree", [0, 2], "the nodes of the branch trees are not cut into lists"),
    ],
)
def test_columns_that_do_not_fit_each_other_are_found(column, to, message):
    """Starts and lengths."""
    with pytest.raises(CheckFailed) as caught:
        check(SQUARE, square([TREE], **{column: ints(to)}))
    assert message in str(caught.value)


REAL = {
    "Chvatal": nx.chvatal_graph(),
    "3x5 grid": nx.grid_2d_graph(3, 5),
    "Q4": nx.hypercube_graph(4),
    "K(3, 3, 4, 5)": nx.complete_multipartite_graph(3, 3, 4, 5),
}


@cache
def solved(name):
    """A graph that the solver settles by cases, and its answer."""
    graph = ours(nx.convert_node_labels_to_integers(REAL[name]))
    return graph, replace(answered(graph, Fill()), chosen=np.zeros(0, np.uint32))


@pytest.mark.parametrize("name", REAL)
def test_answers_by_cases_are_certified_and_confirmed(name):
    """The whole way from the solver's tree to the checker."""
    graph, answer = solved(name)
    assert answer.proof_kinds == (ProofKind.BRANCH,)
    assert answer.proof is ProofKind.CERTIFICATE
    confirmed = check(graph, answer)
    assert confirmed.not_confirmed == ()
    assert any("tree of cases" in what for what in confirmed.what)


@pytest.mark.parametrize("name", REAL)
def test_a_claim_of_one_more_is_not_confirmed(name):
    """The tree proves the fill number and not a pair more."""
    graph, answer = solved(name)
    assert bound(graph, answer.columns) == answer.bound
    better = replace(answer, bound=answer.bound + 1, fill_lower_bound=answer.bound + 1, value=None, fill=None)
    better = replace(better, verdict=Verdict.OVER_FILL, provenance=provenance(graph, answer.bound))
    assert check(graph, better).not_confirmed


def without_node(columns, node):
    """One node less in the only tree."""
    pair = np.delete(columns["branch_pair"].reshape(-1, 2), node, 0)
    return {**columns, "branch_tree": ints([0, len(pair)]), "branch_pair": pair.ravel()}


def turned(columns, node):
    """The two cases of a node the other way round."""
    pair = columns["branch_pair"].reshape(-1, 2)
    nodes, leaf = list(range(len(pair))), np.cumsum(pair[:, 0] == pair[:, 1])
    first, second = after(pair, node + 1), after(pair, after(pair, node + 1))
    order = [*nodes[: node + 1], *nodes[first:second], *nodes[node + 1 : first], *nodes[second:]]
    leaves = [leaf[i] - 1 for i in order if pair[i, 0] == pair[i, 1]]
    return dealt({**columns, "branch_pair": pair[order].ravel()}, leaves)


def after(pair, node):
    """The node behind a case that begins at a node."""
    wanted = 1
    while wanted:
        wanted += 1 if pair[node, 0] != pair[node, 1] else -1
        node += 1
    return node


def dealt(columns, leaves):
    """The rings of the leaves in another order of leaves."""
    starts, ring, group = columns["branch_leaf"], columns["branch_ring"], columns["branch_group"]
    kept = [r for leaf in leaves for r in range(starts[leaf], starts[leaf + 1])]
    groups = [g for r in kept for g in range(ring[r], ring[r + 1])]
    return {
        **columns,
        "branch_leaf": np.cumsum([0, *(starts[leaf + 1] - starts[leaf] for leaf in leaves)]),
        "branch_ring": np.cumsum([0, *(ring[r + 1] - ring[r] for r in kept)]),
        "branch_group": np.cumsum([0, *(group[g + 1] - group[g] for g in groups)]),
        "branch_vertex": np.concatenate([columns["branch_vertex"][group[g] : group[g + 1]] for g in groups]),
        "branch_numerator": columns["branch_numerator"][kept],
        "branch_denominator": columns["branch_denominator"][kept],
    }


@pytest.mark.parametrize("name", REAL)
def test_a_tree_with_a_node_less_is_refused(name):
    """Whichever it is."""
    graph, answer = solved(name)
    for node in range(answer.columns["branch_pair"].size // 2):
        with pytest.raises(CheckFailed):
            bound(graph, without_node(answer.columns, node))


@pytest.mark.parametrize("name", REAL)
def test_a_decision_turned_round_proves_less(name):
    """Each leaf was closed under its own decisions; at the root all leaves change."""
    graph, answer = solved(name)
    assert bound(graph, turned(turned(answer.columns, 0), 0)) == answer.bound
    assert bound(graph, turned(answer.columns, 0)) < answer.bound


@pytest.mark.parametrize("name", ["Chvatal", "K(3, 3, 4, 5)"])
def test_no_number_changed_proves_more(name):
    """Every number of every column, raised and lowered: refused, or a bound that holds; many are noticed."""
    graph, answer = solved(name)
    noticed = 0
    for column in (name for name in answer.columns if name.startswith("branch")):
        for at in range(0, answer.columns[column].size, 7):
            for change in (-1, 1, 2**20):
                spoilt = answer.columns[column].astype(np.int64)
                spoilt[at] = max(0, spoilt[at] + change)
                try:
                    proven = bound(graph, {**answer.columns, column: spoilt})
                except CheckFailed:
                    noticed += 1
                    continue
                assert proven <= answer.value
                noticed += proven < answer.value
    assert noticed > 50


@settings(deadline=None, max_examples=150)
@given(drawn=arbitrary_graphs(7), data=st.data())
def test_no_tree_proves_more_than_the_least_fill(drawn, data):
    """Whatever is decided, and whatever rings the leaves have: what passes is a bound."""
    n, pairs = drawn
    graph, source = Graph.from_edges(n, pairs), networkx_graph(n, pairs)
    gaps = sorted(tuple(sorted(pair)) for pair in nx.complement(source).edges)
    found = list(all_rings(source))
    if not found:
        return
    tree = []
    waiting = [0]
    while waiting:
        depth = waiting.pop()
        free = [pair for pair in gaps if pair not in decided_above(tree, depth)]
        if depth < 3 and free and data.draw(st.booleans()):
            tree.append((depth, data.draw(st.sampled_from(free))))
            waiting += [depth + 1, depth + 1]
        else:
            rings = data.draw(st.lists(st.sampled_from(found), max_size=4))
            shares = [(data.draw(st.integers(0, 8)), data.draw(st.integers(1, 3))) for _ in rings]
            tree.append((depth, (rings, shares)))
    assert bound(graph, branches([[node for _, node in tree]])) <= least_fill(n, pairs)


def decided_above(tree, depth):
    """Pairs decided on the way to a node of this depth that comes next."""
    found = {}
    for at, node in tree:
        found = {level: pair for level, pair in found.items() if level < at}
        if not isinstance(node[0], list):
            found[at] = node
    return {pair for level, pair in found.items() if level < depth}


def test_trees_survive_json():
    """What is printed is read back."""
    graph, answer = solved("Chvatal")
    labels = Labels(None)
    found = witness.to_json(answer.columns, labels, graph.n)
    back = witness.from_json(found, int, graph.n)
    for name, column in answer.columns.items():
        if name.startswith(("branch", "packing")):
            assert back[name].tolist() == column.tolist(), name
            assert back[name].dtype == column.dtype, name
