"""Canonical form, against a reading of its definition row by row."""

from __future__ import annotations

import struct
from collections.abc import Sequence
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from nearchord_service.api import canonical
from nearchord_service.model.content import ContentKind
from nearchord_service.model.errors import ContentInvalid


def encode(rows: Sequence[Sequence[int]], m: int | None = None) -> bytes:
    """Write rows of targets the way the contract says."""
    targets = [target for row in rows for target in row]
    pointers = [0]
    for row in rows:
        pointers.append(pointers[-1] + len(row))
    header = struct.pack("<IQ", len(rows), len(targets) if m is None else m)
    return header + struct.pack(f"<{len(pointers)}Q", *pointers) + struct.pack(f"<{len(targets)}I", *targets)


def first_wrong_row(rows: Sequence[Sequence[int]]) -> int | None:
    """Read the definition: targets of row u lie in u + 1 .. n - 1 and ascend strictly."""
    for u, row in enumerate(rows):
        if any(not u < v < len(rows) for v in row) or any(b <= a for a, b in pairwise(row)):
            return u
    return None


def complaint(data: bytes, kind: ContentKind = ContentKind.GRAPH) -> str:
    with pytest.raises(ContentInvalid) as caught:
        canonical.check(kind, data, "place")
    (violation,) = caught.value.violations
    assert violation.field == "place"
    return violation.description


many_rows = st.integers(0, 7).flatmap(
    lambda n: st.lists(
        st.lists(st.integers(0, n), max_size=4) | st.lists(st.integers(0, n), max_size=4, unique=True).map(sorted),
        min_size=n,
        max_size=n,
    )
)


@given(many_rows, st.sampled_from([1, 2, 3, 2**20]))
def test_the_first_wrong_row_is_named(rows: list[list[int]], piece: int) -> None:
    """Whatever the size of a piece, the check agrees with the definition, and names the first row that breaks it."""
    wrong = first_wrong_row(rows)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(canonical, "_PIECE", piece)
        if wrong is None:
            assert canonical.check_graph(encode(rows), "place") == (len(rows), sum(map(len, rows)))
        else:
            assert complaint(encode(rows)).startswith(f"row {wrong} ")


@pytest.mark.parametrize(
    ("rows", "description"),
    [
        ([[1], [1], []], "row 1 names vertex 1 itself: a self-loop; drop it"),
        ([[1, 1], []], "row 0 names vertex 1 twice: a repeated edge; drop it"),
        ([[2, 1], [], []], "row 0 names vertex 1 after 2; targets of a row ascend"),
        ([[], [0]], "row 1 names vertex 0: an edge stands once, in the row of its smaller end (row 0)"),
        ([[1, 2], []], "row 0 names vertex 2, but n = 2: vertices are numbered from 0 to 1"),
    ],
)
def test_what_is_wrong_with_a_row_is_said(rows: list[list[int]], description: str) -> None:
    assert complaint(encode(rows)) == description


def test_an_edge_count_other_than_announced_is_refused() -> None:
    assert complaint(encode([[1], []], m=2)) == (
        "announces n = 2 and m = 2, which take 44 bytes, but has 40; "
        "send n + 1 row pointers, m targets and nothing else"
    )


def test_trailing_bytes_are_refused() -> None:
    assert "which take 40 bytes, but has 41" in complaint(encode([[1], []]) + b"\0")


def test_a_piece_of_a_header_is_refused() -> None:
    assert complaint(b"\0" * 11) == "has 11 bytes, but n (uint32) and m (uint64) alone take 12"


def test_a_count_beyond_any_memory_is_refused_by_length() -> None:
    """The announced size is computed, never allocated."""
    data = struct.pack("<IQ", 2**32 - 1, 2**64 - 1) + bytes(8)
    assert "but has 20" in complaint(data)


@pytest.mark.parametrize(
    ("pointers", "description"),
    [
        ((1, 1, 1), "row pointer 0 is 1; row 0 begins at target 0"),
        ((0, 1, 0), "row pointer 2 (the last) is 0, but m = 1 edges are announced"),
        ((0, 2, 1), "row 0 ends at target 2 but begins at 0 of 1; row pointers never descend and never exceed m"),
        (
            (0, 2**63, 1),
            f"row 0 ends at target {2**63} but begins at 0 of 1; row pointers never descend and never exceed m",
        ),
    ],
)
def test_wrong_row_pointers_are_named(pointers: tuple[int, ...], description: str) -> None:
    data = struct.pack("<IQ3QI", 2, 1, *pointers, 1)
    assert complaint(data) == description


def test_a_wrong_row_behind_the_first_piece_is_found() -> None:
    """Rows are counted over the pieces, not within one."""
    n = 2**20 + 10
    pointers = np.zeros(n + 1, "<u8")
    pointers[n - 3 :] = 1
    data = struct.pack("<IQ", n, 1) + pointers.tobytes() + struct.pack("<I", n - 4)
    assert complaint(data) == f"row {n - 4} names vertex {n - 4} itself: a self-loop; drop it"


@pytest.mark.parametrize("n", [0, 1, 200_000])
def test_graphs_without_edges_are_fine(n: int) -> None:
    assert canonical.check_graph(struct.pack("<IQ", n, 0) + bytes(8 * (n + 1)), "place") == (n, 0)


def weights(*values: int) -> bytes:
    return struct.pack(f"<{len(values)}q", *values)


def test_weights_are_counted() -> None:
    assert canonical.check(ContentKind.WEIGHTS, weights(0, 2**62 - 1), "place") == (2, 0)
    assert canonical.check(ContentKind.WEIGHTS, b"", "place") == (0, 0)


@pytest.mark.parametrize(
    ("data", "description"),
    [
        (weights(1, 2)[:-1], "has 15 bytes, which is no multiple of 8; send one int64 a vertex"),
        (weights(3, -1, -2), "vertex 1 weighs -1; weights are at least 0"),
        (
            weights(2**61, 2**61 - 1, 1, 5),
            "the weights up to vertex 2 add up to 2^62 or more; scale them so that their sum stays below",
        ),
        (
            weights(2**63 - 1, 2**63 - 1, 2**63 - 1),
            "the weights up to vertex 0 add up to 2^62 or more; scale them so that their sum stays below",
        ),
    ],
)
def test_wrong_weights_are_named(data: bytes, description: str) -> None:
    assert complaint(data, ContentKind.WEIGHTS) == description


@given(st.lists(st.integers(0, 2**62), max_size=6), st.sampled_from([1, 2, 2**20]))
def test_the_sum_of_weights_is_exact(values: list[int], piece: int) -> None:
    """The sum never wraps around, in whatever pieces it is taken."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(canonical, "_PIECE", piece)
        if sum(values) < 2**62:
            assert canonical.check_weights(weights(*values), "place") == len(values)
        else:
            first = next(i for i in range(len(values)) if sum(values[: i + 1]) >= 2**62)
            assert f"up to vertex {first} " in complaint(weights(*values), ContentKind.WEIGHTS)


@given(st.lists(st.text(st.characters(exclude_categories=("Cc", "Cs")), max_size=5)), st.sampled_from([1, 2, 3, 2**20]))
def test_any_names_without_control_characters_are_fine(names: list[str], piece: int) -> None:
    data = "".join(name + "\n" for name in names).encode()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(canonical, "_PIECE", piece)
        assert canonical.check_names(data, "place") == len(names)


@pytest.mark.parametrize("piece", [1, 2, 3, 2**20])
@pytest.mark.parametrize(
    ("data", "description"),
    [
        (b"a\nb", "name 1 (the last) is not ended by a line feed; end every name with one"),
        (b"a\nb\tc\n", "name 1 holds the control character U+0009; remove it"),
        (b"a\n\xc2\x85\n", "name 1 holds the control character U+0085; remove it"),
        (b"a\r\n", "name 0 holds the control character U+000D; remove it"),
        (b"a\nb\n\xffc\n", "name 2 is not UTF-8: invalid start byte; encode names as UTF-8"),
        (b"\xe2\x82\n\xff\n", "name 0 is not UTF-8: invalid continuation byte; encode names as UTF-8"),
        (b"a\n\xe2\x82", "name 1 is not UTF-8: it ends in the middle of a character"),
    ],
)
def test_wrong_names_are_named(data: bytes, description: str, piece: int) -> None:
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(canonical, "_PIECE", piece)
        assert complaint(data, ContentKind.NAMES) == description
