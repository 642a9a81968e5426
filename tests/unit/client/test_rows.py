"""Rows of the canonical form, against sorted pairs, however small the blocks are in which they are made."""

from __future__ import annotations

import nearchord
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from nearchord import rows
from strategies import arbitrary_graphs

blocks = st.sampled_from([1, 2, 3, 5, rows.BLOCK])
dtypes = st.sampled_from([np.int8, np.uint8, np.uint32, np.int64])


def made(block, n, pairs, dtype=np.int64, other=None):
    """What `rows` gives for pairs, as lists."""
    ends = np.array(pairs, np.int64).reshape(-1, 2)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(rows, "BLOCK", block)
        row_ptr, targets = rows.rows(n, ends[:, 0].astype(dtype), ends[:, 1].astype(other or dtype))
    return row_ptr.tolist(), targets.tolist()


def expected(n, pairs):
    """The definition: the edges of every smaller end together, the larger ends ascending."""
    ascending = sorted((min(pair), max(pair)) for pair in pairs)
    return [sum(u < row for u, _ in ascending) for row in range(n + 1)], [v for _, v in ascending]


@given(arbitrary_graphs(), blocks, dtypes, dtypes)
def test_edges_in_order_are_taken_over(graph, block, one, other):
    """The columns may be of different types."""
    n, pairs = graph
    assert made(block, n, pairs, one, other) == expected(n, pairs)


@given(arbitrary_graphs(), blocks, dtypes, st.data())
def test_edges_in_any_order_are_sorted(graph, block, dtype, data):
    """Also where all point the same way, or only some of them are turned."""
    n, pairs = graph
    mixed = data.draw(st.permutations(pairs) | st.just(pairs))
    turned = data.draw(st.sampled_from([st.just(False), st.just(True), st.booleans()]))
    turns = data.draw(st.lists(turned, min_size=len(pairs), max_size=len(pairs)))
    turned = [pair[::-1] if turn else pair for pair, turn in zip(mixed, turns, strict=True)]
    assert made(block, n, turned, dtype) == expected(n, pairs)


@pytest.mark.parametrize("place", range(5))
@pytest.mark.parametrize("block", [1, 2, 3])
def test_two_edges_out_of_order_are_noticed_across_blocks(place, block):
    """Edges that ascend but for two neighbours, of one row or of two."""
    for pairs in ([(0, v) for v in range(1, 7)], [(u, 6) for u in range(6)]):
        pairs[place : place + 2] = reversed(pairs[place : place + 2])
        assert made(block, 7, pairs) == expected(7, pairs)


def first_wrong(n, pairs):
    """The place of the first pair out of range or with equal ends, otherwise of the first that was there before."""
    for place, (u, v) in enumerate(pairs):
        if u == v or not (0 <= u < n and 0 <= v < n):
            return place
    seen = set()
    for place, pair in enumerate(pairs):
        if frozenset(pair) in seen:
            return place
        seen.add(frozenset(pair))
    return None


ends = st.integers(-1, 5)


@given(
    st.lists(st.tuples(ends, ends), max_size=8).flatmap(lambda pairs: st.sampled_from([pairs, sorted(pairs)])), blocks
)
def test_the_first_wrong_edge_is_named(pairs, block):
    """In whatever block it is, and whether the edges before it are in order or not."""
    wrong = first_wrong(5, pairs)
    if wrong is None:
        assert made(block, 5, pairs) == expected(5, pairs)
    else:
        with pytest.raises(nearchord.BadInput, match=rf"^edge {wrong} \("):
            made(block, 5, pairs)
