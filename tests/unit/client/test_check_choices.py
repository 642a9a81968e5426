"""The checker on cliques, colours and forests: right answers pass, wrong ones are named."""

from __future__ import annotations

from dataclasses import replace

import networkx as nx
import numpy as np
import pytest
from definition import is_colourable, is_forest
from nearchord import Answer, CheckFailed, Clique, ColourableSubgraph, Graph, InducedForest, Verdict, check
from nearchord.checks import contradictions
from unit.client.test_check import answer

KITE = Graph.from_edges(5, [(0, 1), (0, 2), (1, 2), (1, 3), (2, 3), (3, 4)], weights=[3, 1, 4, 1, 5])


def coloured(chosen, colours, value, q=2):  # type: ignore[no-untyped-def]
    """An answer with a column of colours."""
    given = answer(KITE, ColourableSubgraph(colours=q), chosen, value)
    return replace(given, columns={"colour": np.array(colours, np.uint32)})


def test_right_choices_are_confirmed() -> None:
    assert "pairwise adjacent" in check(KITE, answer(KITE, Clique(), [0, 1, 2], 8)).what[0]
    assert "no cycle" in check(KITE, answer(KITE, InducedForest(), [0, 2, 3, 4], 13)).what[0]
    assert "2 colours" in check(KITE, coloured([0, 2, 3, 4], [1, 2, 1, 2], 13)).what[0]


@pytest.mark.parametrize(
    ("given", "message"),
    [
        (answer(KITE, Clique(), [0, 1, 3], 5), "the chosen vertices {0, 3} are not adjacent"),
        (answer(KITE, InducedForest(), [0, 1, 2], 8), "the chosen set has a cycle through the edge {1, 2}"),
        (coloured([0, 2, 3, 4], [1, 1, 2, 1], 13), "both ends of the edge {0, 2} have the colour 1"),
        (coloured([0, 2, 3, 4], [1, 3, 1, 2], 13), "a colour lies outside 1 to 2"),
        (coloured([0, 2, 3, 4], [1, 2, 1], 13), "4 vertices are chosen, but 3 colours are given"),
    ],
)
def test_wrong_choices_are_named(given, message) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(CheckFailed, match=message.replace("{", "\\{").replace("}", "\\}")):
        check(KITE, given)


def test_infeasible_cliques_rest_on_a_pair_without_an_edge() -> None:
    given = replace(answer(KITE, Clique(must=[0, 3]), [], None, None, Verdict.INFEASIBLE), bound=None)
    assert "{0, 3} is no edge" in check(KITE, given).what[0]
    wrong = replace(answer(KITE, Clique(must=[0, 1]), [], None, None, Verdict.INFEASIBLE), bound=None)
    with pytest.raises(CheckFailed, match="do not contradict"):
        check(KITE, wrong)


def refused(graph: Graph, given: Answer) -> bool:
    """Whether the checker finds that the pins do not contradict each other; otherwise it confirms that they do."""
    try:
        return bool(check(graph, given).not_confirmed)
    except CheckFailed:
        return True


def test_infeasible_colours_and_forests_are_confirmed_from_the_definition() -> None:
    """Over graphs of the atlas, with every vertex to be chosen: confirmed if and only if that is impossible."""
    for source in nx.graph_atlas_g()[1:1253:7]:
        n, edges = len(source), sorted(tuple(sorted(edge)) for edge in source.edges)
        graph = Graph.from_edges(n, edges)
        for question in (InducedForest(must=range(n)), *(ColourableSubgraph(range(n), (), q) for q in (1, 2, 3, 4))):
            given = replace(answer(graph, question, [], None, None, Verdict.INFEASIBLE), bound=None)
            holds = is_forest(edges, range(n))
            if isinstance(question, ColourableSubgraph):
                holds = is_colourable(edges, range(n), question.colours)
            assert refused(graph, given) == holds, (edges, question)


def test_colours_that_take_too_long_to_rule_out_are_left_open(monkeypatch: pytest.MonkeyPatch) -> None:
    """The search has a limit."""
    monkeypatch.setattr(contradictions, "MOST_STEPS", 4)
    question = ColourableSubgraph(must=range(5), colours=2)
    given = replace(answer(KITE, question, [], None, None, Verdict.INFEASIBLE), bound=None)
    assert "too long" in check(KITE, given).not_confirmed[0]
