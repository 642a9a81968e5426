"""The checker on structure reports: components and cores are confirmed, predictions are not."""

from __future__ import annotations

from dataclasses import replace

import nearchord
import networkx as nx
import numpy as np
import pytest
from fill_answers import cut, fill_answer
from hypothesis import given
from nearchord import CheckFailed, Graph, Prediction, StructureReport, Verdict, check
from nearchord.checks.structure import components
from strategies import graphs

SQUARE_AND_POINT = Graph.from_edges(5, [(0, 1), (1, 2), (2, 3), (0, 3)])


def report(**changes):
    """The structure of a square beside a single vertex."""
    start, vertex = cut([[0, 1, 2, 3]])
    predictions = (Prediction("independent-set", 0, 7, at_least=False, memory_bytes=64, fits=True),)
    fields = {
        "question": nearchord.Structure(),
        "columns": {"core_start": start, "core_vertex": vertex},
        "recognition": None,
        "structure": StructureReport(2, 4, predictions),
        **changes,
    }
    return replace(fill_answer(SQUARE_AND_POINT), **fields)


def test_what_a_triangulation_would_be_needed_for_is_not_confirmed():
    confirmed = check(SQUARE_AND_POINT, report())
    assert confirmed.what == (
        "the graph has 2 connected components",
        "1 fill core is named, the largest with 4 vertices",
    )
    assert [word.split(":")[0] for word in confirmed.not_confirmed] == ["the predictions", "the fill 1"]


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"structure": StructureReport(1, 4, ())}, "the components are given as 1, but there are 2"),
        ({"structure": StructureReport(2, 5, ())}, "the largest fill core is given as 5, but has 4 vertices"),
        ({"fill_cores": 2}, "the fill cores are given as 2, but 1 fill core is named"),
        ({"bound": 2}, "the bound 2 contradicts the value 1"),
        ({"bound": 0}, "the verdict is PROVEN, but the bound 0 is not the value 1"),
        ({"value": None}, "the verdict is PROVEN, but there is no value"),
        ({"columns": dict(zip(("core_start", "core_vertex"), cut([[1, 9, 2, 3]]), strict=True))}, "has vertex 9"),
    ],
)
def test_every_fault_of_a_report_is_found_and_named(changes, message):
    with pytest.raises(CheckFailed) as caught:
        check(SQUARE_AND_POINT, report(**changes))
    assert message in str(caught.value)


def test_a_chordal_graph_has_no_fill_cores_to_name():
    path = Graph.from_edges(3, [(0, 1), (1, 2)])
    start, vertex = cut([])
    chordal = replace(
        fill_answer(path),
        question=nearchord.Structure(),
        columns={"core_start": start, "core_vertex": vertex},
        recognition=None,
        structure=StructureReport(1, 0, ()),
    )
    confirmed = check(path, chordal)
    assert confirmed.what == ("the graph has 1 connected component",)
    assert confirmed.not_confirmed[-1] == "the fill 0: ask the question fill for witnesses"


def test_a_report_that_ran_out_of_time_confirms_nothing():
    unread = report(verdict=Verdict.BOUNDED, value=None, bound=0, structure=None, columns={})
    assert check(SQUARE_AND_POINT, unread).what == ()


@given(drawn=graphs())
def test_components_are_counted_as_networkx_counts_them(drawn):
    n, pairs = drawn
    source = nx.Graph(pairs)
    source.add_nodes_from(range(n))
    assert components(Graph.from_edges(n, pairs)) == nx.number_connected_components(source)


def test_components_of_long_paths_take_few_rounds():
    """A path numbered at random, where labels that only crept along edges would need as many rounds as vertices."""
    n = 100_000
    name = np.random.default_rng(5).permutation(n)
    assert components(Graph.from_arrays(n, name[:-1], name[1:])) == 1
