"""The checker on plans that serve everybody: what it refuses, and in which words."""

from dataclasses import replace

import nearchord
import numpy as np
import pytest
from nearchord.checks import splitting
from nearchord.checks.plan import check_plan
from plans import as_answer, planned

RING = [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)]
GRAPH = nearchord.Graph.from_edges(5, RING)
TWO = np.full(5, 2, np.int64)


def answer(whole: bool) -> nearchord.Answer:
    """The ring of five with a demand of two each: five colours, or a frame of five."""
    return as_answer(GRAPH, planned(5, RING, [2] * 5, whole=whole), whole)


def i64(*numbers: int) -> np.ndarray:
    return np.array(numbers, np.int64)


def u32(*numbers: int) -> np.ndarray:
    return np.array(numbers, np.uint32)


FAULTS = [
    (True, {"colour": u32(1, 2)}, "not cut into one list"),
    (True, {"colour": np.zeros(10, np.int64)}, "no column colour"),
    (True, {"colour_start": i64(0, 3, 4, 6, 8, 10)}, "has 3 colours, but demands 2"),
    (True, {"colour_start": i64(0, 2**62, 4, 6, 8, 10)}, "colours, but demands 2"),
    (True, {"colour": u32(2, 1, 3, 4, 1, 5, 2, 3, 4, 5)}, "do not ascend"),
    (True, {"colour": u32(0, 1, 3, 4, 1, 5, 2, 3, 4, 5)}, "colour 0"),
    (True, {"colour": u32(1, 2, 3, 4, 1, 2, 3, 4, 5, 9)}, "6 colours up to 9 are used"),
    (True, {"colour": u32(1, 2, 2, 3, 4, 5, 1, 2, 3, 4)}, "have the colour 2"),
    (False, {"share_denominator": i64(0)}, "one denominator above 0"),
    (False, {"share_numerator": i64(1)}, "one number above 0 a set"),
    (False, {"share_start": i64(0, 2**62)}, "do not ascend from 0"),
    (False, {"share_denominator": i64(3)}, "the shares add up to"),
    (False, {"bottleneck_denominator": i64()}, "one denominator above 0"),
    (False, {"bottleneck_denominator": i64(1)}, "may be worth"),
    (False, {"bottleneck_numerator": i64(1, 1)}, "not one bottleneck price"),
    (False, {"bottleneck_numerator": i64(-1, 1, 1, 1, 1)}, "not one bottleneck price"),
    (False, {"bottleneck_numerator": i64(2**62, 1, 1, 1, 1)}, "covers"),
]


@pytest.mark.parametrize(("whole", "columns", "message"), FAULTS)
def test_faults_are_named(whole: bool, columns: dict[str, np.ndarray], message: str) -> None:
    right = answer(whole)
    assert check_plan(GRAPH, right, TWO).not_confirmed == ()
    with pytest.raises(nearchord.CheckFailed, match=message):
        check_plan(GRAPH, replace(right, columns={**right.columns, **columns}), TWO)


SHARES = [
    (u32(0, 2, 1, 3, 2, 4, 0, 3, 1, 9), "has vertex 9"),
    (u32(2, 0, 1, 3, 2, 4, 0, 3, 1, 4), "do not ascend"),
    (u32(0, 2, 1, 3, 2, 4, 0, 3, 1, 3), "vertex 4 is served for 1, but demands 2"),
    (u32(0, 1, 2, 3, 2, 4, 0, 3, 1, 4), "share 0 has both ends of the edge"),
]


@pytest.mark.parametrize(("vertex", "message"), SHARES)
def test_faults_in_shares_are_named(vertex: np.ndarray, message: str) -> None:
    """Five pairs of vertices of the ring, for one unit each."""
    columns = {
        **answer(False).columns,
        "share_start": i64(0, 2, 4, 6, 8, 10),
        "share_vertex": u32(0, 2, 1, 3, 2, 4, 0, 3, 1, 4),
        "share_numerator": i64(1, 1, 1, 1, 1),
        "share_denominator": i64(1),
    }
    right = replace(answer(False), columns=columns)
    assert check_plan(GRAPH, right, TWO).not_confirmed == ()
    with pytest.raises(nearchord.CheckFailed, match=message):
        check_plan(GRAPH, replace(right, columns={**columns, "share_vertex": vertex}), TWO)


CLIQUES = [
    (u32(0, 9), "vertex 9 of 5"),
    (u32(1, 0), "does not ascend"),
    (u32(0, 2), "not pairwise adjacent"),
    (u32(0, 1), "demands 4"),
]


@pytest.mark.parametrize(("clique", "message"), CLIQUES)
def test_faults_in_cliques_are_named(clique: np.ndarray, message: str) -> None:
    right = answer(True)
    with pytest.raises(nearchord.CheckFailed, match=message):
        check_plan(GRAPH, replace(right, columns={**right.columns, "proof_clique": clique}), TWO)


@pytest.mark.parametrize("whole", [True, False])
def test_an_answer_on_the_wrong_side_or_with_vertices_is_refused(whole: bool) -> None:
    right = answer(whole)
    with pytest.raises(nearchord.CheckFailed, match="contradicts the value"):
        check_plan(GRAPH, replace(right, bound=right.bound + 1), TWO)
    with pytest.raises(nearchord.CheckFailed, match="chooses none"):
        check_plan(GRAPH, replace(right, chosen=u32(0)), TWO)


def test_a_bound_without_a_proof_is_left_open() -> None:
    right = answer(True)
    plan = {name: right.columns[name] for name in ("colour", "colour_start")}
    (left,) = check_plan(GRAPH, replace(right, columns=plan), TWO).not_confirmed
    assert "carries no proof" in left
    searched = replace(right, columns=plan, proof=nearchord.ProofKind.SEARCH)
    (left,) = check_plan(GRAPH, searched, TWO).not_confirmed
    assert "rests on a search" in left


def test_a_proof_of_too_many_states_is_left_open(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(splitting, "MOST_STATES", 3)
    (left,) = check_plan(GRAPH, answer(False), TWO).not_confirmed
    assert "too long" in left
