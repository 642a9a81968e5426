"""What answers say beside value and choice, read from the columns of the contract."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import nearchord
import numpy as np
import pytest
from nearchord.session.assembly import AnswerAssembly
from nearchord.v1 import job_pb2, question_pb2
from unit.client.fake_service import column_parts


def read(question: str, columns: dict[str, Any], **head: Any) -> nearchord.Answer:
    """An answer to a question as it comes over the wire; lists of vertices and colours are uint32, all else int64."""
    asked = question_pb2.Question()
    getattr(asked, question).SetInParent()
    typed = {
        name: np.array(values, np.uint32 if name.endswith(("chosen", "colour", "vertex")) else np.int64)
        for name, values in columns.items()
    }
    assembly = AnswerAssembly()
    for part in column_parts(typed, question=asked, verdict=job_pb2.VERDICT_PROVEN, vertices=4, **head):
        assert assembly.take(part) is None
    answer = assembly.finish()
    assert answer is not None
    return answer


def test_prices_and_best_sets_are_read() -> None:
    answer = read(
        "independent_set",
        {
            "chosen": [0, 2],
            "price_in": [0, 5, 0, -1],
            "price_out": [2, 0, 3, 0],
            "conflict_price": [1, 0],
            "best_value": [7, 5, 5],
            "best_start": [0, 2, 3, 3],
            "best_chosen": [0, 2, 1],
        },
    )
    assert (answer.price_in.tolist(), answer.price_out.tolist()) == ([0, 5, 0, -1], [2, 0, 3, 0])
    assert answer.conflict_price.tolist() == [1, 0]
    assert [(value, chosen.tolist()) for value, chosen in answer.best] == [(7, [0, 2]), (5, [1]), (5, [])]


def test_scenarios_are_read_with_their_colours() -> None:
    columns = {
        "scenario_value": [7, 0],
        "scenario_bound": [8, 0],
        "scenario_start": [0, 2, 2],
        "scenario_chosen": [0, 2],
    }
    for colours, found in (({}, []), ({"scenario_colour": [2, 1]}, [2, 1])):
        first, second = read("colourable_subgraph", {**columns, **colours}).scenarios
        assert (first.value, first.bound, first.chosen.tolist(), first.colour.tolist()) == (7, 8, [0, 2], found)
        assert (second.value, second.bound, second.chosen.tolist(), second.colour.tolist()) == (0, 0, [], [])


def test_colours_of_a_vertex_are_found_in_all_three_forms() -> None:
    """By choice, by vertex, and by vertex with demands."""
    chosen = read("colourable_subgraph", {"chosen": [0, 3], "colour": [1, 2]})
    assert [chosen.colours_of(v) for v in range(4)] == [(1,), (), (), (2,)]
    plain = read("colouring", {"colour": [1, 2, 1, 3]})
    assert [plain.colours_of(v) for v in range(4)] == [(1,), (2,), (1,), (3,)]
    demanding = read("colouring", {"colour": [1, 3, 2], "colour_start": [0, 2, 2, 3, 3]})
    assert [demanding.colours_of(v) for v in range(4)] == [(1, 3), (), (2,), ()]
    assert read("independent_set", {"chosen": [1]}).colours_of(1) == ()


def test_shares_and_bottleneck_are_exact_fractions() -> None:
    answer = read(
        "fractional_colouring",
        {
            "share_start": [0, 2, 3],
            "share_vertex": [0, 2, 1],
            "share_numerator": [1, 3],
            "share_denominator": [2],
            "bottleneck_numerator": [0, 2, 4, 0],
            "bottleneck_denominator": [6],
        },
    )
    assert [(share, of.tolist()) for share, of in answer.shares] == [(Fraction(1, 2), [0, 2]), (Fraction(3, 2), [1])]
    assert answer.bottleneck == [0, Fraction(1, 3), Fraction(2, 3), 0]


def test_what_an_answer_does_not_have_is_empty() -> None:
    answer = read("independent_set", {"chosen": [0]})
    assert (answer.best, answer.scenarios, answer.shares, answer.bottleneck, answer.count) == ([], [], [], [], None)
    assert (answer.price_in.size, answer.price_out.size, answer.conflict_price.size) == (0, 0, 0)


def test_counts_of_any_length_are_read() -> None:
    """More digits than int() takes."""
    assert read("independent_set", {}, count="12").count == 12
    assert read("independent_set", {}, count="9" * 100_000).count == 10**100_000 - 1


@pytest.mark.parametrize("count", ["", "12a", "-3", "1.5", "\u0663"])
def test_a_count_that_is_no_number_is_a_fault_of_the_server(count: str) -> None:
    with pytest.raises(nearchord.ServerFault, match="came as something else than digits"):
        read("independent_set", {}, count=count)
