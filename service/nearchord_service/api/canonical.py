"""Checks that bytes are a graph, weights or names in canonical form, naming the first row that is not.

Each check is one pass in pieces: time O(length), and less than a few MiB beside the bytes themselves whatever their
length.
Violations name `field`, the place of the bytes in the request.
"""

from __future__ import annotations

import codecs
from collections.abc import Iterator
from itertools import accumulate
from typing import Any, NoReturn

import numpy as np
from numpy.typing import NDArray

from nearchord_service.model.content import ContentKind
from nearchord_service.model.errors import ContentInvalid, FieldViolation

HEADER_BYTES = 12
WEIGHT_SUM_LIMIT = 2**62
_PIECE = 2**14
"""Elements or bytes at a time: what is computed from so many stays in the processor's cache."""

Buffer = bytes | memoryview
Array = NDArray[Any]


def check(kind: ContentKind, data: Buffer, field: str) -> tuple[int, int]:
    """Return (vertices, edges); raises ContentInvalid naming `field`."""
    if kind is ContentKind.GRAPH:
        return check_graph(data, field)
    if kind is ContentKind.WEIGHTS:
        return check_weights(data, field), 0
    return check_names(data, field), 0


def _refuse(field: str, description: str) -> NoReturn:
    raise ContentInvalid(FieldViolation(field, description))


def check_graph(data: Buffer, field: str) -> tuple[int, int]:
    """Return (n, m) of a graph: n uint32, m uint64, n + 1 row pointers uint64, m targets uint32, little-endian."""
    if len(data) < HEADER_BYTES:
        _refuse(field, f"has {len(data)} bytes, but n (uint32) and m (uint64) alone take {HEADER_BYTES}")
    n = int(np.frombuffer(data, "<u4", 1)[0])
    m = int(np.frombuffer(data, "<u8", 1, 4)[0])
    wanted = HEADER_BYTES + 8 * (n + 1) + 4 * m
    if len(data) != wanted:
        _refuse(
            field,
            f"announces n = {n} and m = {m}, which take {wanted} bytes, but has {len(data)}; "
            "send n + 1 row pointers, m targets and nothing else",
        )
    pointers = np.frombuffer(data, "<u8", n + 1, HEADER_BYTES)
    targets = np.frombuffer(data, "<u4", m, HEADER_BYTES + 8 * (n + 1))
    _check_ends(pointers, n, m, field)
    for first in range(0, n, _PIECE):
        _check_pointers(pointers[first : first + _PIECE + 1].astype("u8"), first, m, field)
    for first in range(0, n, _PIECE):
        _check_rows(pointers[first : first + _PIECE + 1].astype("i8"), first, targets, n, field)
    return n, m


def _check_ends(pointers: Array, n: int, m: int, field: str) -> None:
    if pointers[0] != 0:
        _refuse(field, f"row pointer 0 is {pointers[0]}; row 0 begins at target 0")
    if pointers[n] != m:
        _refuse(field, f"row pointer {n} (the last) is {pointers[n]}, but m = {m} edges are announced")


def _check_pointers(pointers: Array, first: int, m: int, field: str) -> None:
    if bool((pointers[1:] >= pointers[:-1]).all()) and pointers[-1] <= m:
        return
    wrong = (pointers[1:] < pointers[:-1]) | (pointers[1:] > m)
    at = int(np.argmax(wrong))
    _refuse(
        field,
        f"row {first + at} ends at target {pointers[at + 1]} but begins at {pointers[at]} of {m}; "
        "row pointers never descend and never exceed m",
    )


def _check_rows(pointers: Array, first: int, targets: Array, n: int, field: str) -> None:
    """Check the rows `first`, `first` + 1, ... that `pointers` (int64, one more than rows) delimits.

    Where a row ascends strictly, its first target exceeds the row and its last is below n, so do all between.
    """
    filled = np.flatnonzero(pointers[1:] > pointers[:-1])
    if not len(filled):
        return
    begins, lasts = targets[pointers[filled]], targets[pointers[filled + 1] - 1]
    wrong = (begins <= filled + first) | (lasts >= n)
    # A target that does not exceed the one before is in order only where a row begins, so counting tells.
    descents = _descents(targets, int(pointers[0]), int(pointers[-1]))
    if not wrong.any() and descents == np.count_nonzero(begins[1:] <= lasts[:-1]):
        return
    ends = filled[np.flatnonzero(wrong)[:1]]
    bad = [*ends.tolist(), *_first_descent(pointers, targets)]
    if bad:
        row = min(bad)
        _refuse_row(first + row, targets, int(pointers[row]), int(pointers[row + 1]), n, field)


def _descents(targets: Array, begin: int, end: int) -> int:
    """Count the targets from `begin` + 1 to `end` - 1 that do not exceed the one before."""
    pieces = (targets[start : min(end, start + _PIECE + 1)] for start in range(begin, end, _PIECE))
    return sum(int(np.count_nonzero(piece[1:] <= piece[:-1])) for piece in pieces)


def _first_descent(pointers: Array, targets: Array) -> list[int]:
    """Return the first row (from the first pointer on) in which a target does not exceed the one before, if any."""
    begin, end = int(pointers[0]), int(pointers[-1])
    for start in range(begin, end, _PIECE):
        stop = min(end, start + _PIECE)
        lead = max(begin, start - 1)
        piece = targets[lead:stop]
        rises = piece[1:] > piece[:-1]
        if bool(rises.all()):
            continue
        low, high = np.searchsorted(pointers, (lead + 1, stop))
        rises[pointers[low:high] - lead - 1] = True
        if not bool(rises.all()):
            position = lead + 1 + int(np.argmin(rises))
            return [int(np.searchsorted(pointers, position, "right")) - 1]
    return []


def _refuse_row(row: int, targets: Array, start: int, stop: int, n: int, field: str) -> NoReturn:
    before = row
    for begin in range(start, stop, _PIECE):
        piece = targets[begin : min(stop, begin + _PIECE)].astype("i8")
        previous = np.concatenate(([before], piece[:-1]))
        wrong = (piece <= previous) | (piece >= n)
        if wrong.any():
            at = int(np.argmax(wrong))
            _refuse_target(row, int(piece[at]), int(previous[at]), n, field)
        before = int(piece[-1])
    raise AssertionError(f"row {row} was found wrong before")


def _refuse_target(row: int, target: int, previous: int, n: int, field: str) -> NoReturn:
    if target >= n:
        what = f"names vertex {target}, but n = {n}: vertices are numbered from 0 to {n - 1}"
    elif target == row:
        what = f"names vertex {row} itself: a self-loop; drop it"
    elif target < row:
        what = f"names vertex {target}: an edge stands once, in the row of its smaller end (row {target})"
    elif target == previous:
        what = f"names vertex {target} twice: a repeated edge; drop it"
    else:
        what = f"names vertex {target} after {previous}; targets of a row ascend"
    _refuse(field, f"row {row} {what}")


def check_weights(data: Buffer, field: str) -> int:
    """Return the number of weights: little-endian int64, each >= 0, their sum below 2^62."""
    if len(data) % 8:
        _refuse(field, f"has {len(data)} bytes, which is no multiple of 8; send one int64 a vertex")
    weights = np.frombuffer(data, "<i8")
    total = 0
    for first in range(0, len(weights), _PIECE):
        piece = weights[first : first + _PIECE]
        if int(piece.min()) < 0:
            at = int(np.argmax(piece < 0))
            _refuse(field, f"vertex {first + at} weighs {piece[at]}; weights are at least 0")
        # Two halves, because a piece of large weights overflows an int64 sum.
        heavier = total + (int((piece >> 32).sum()) << 32) + int((piece & 0xFFFFFFFF).sum())
        if heavier >= WEIGHT_SUM_LIMIT:
            sums = accumulate(piece.tolist(), initial=total)
            at = next(i for i, value in enumerate(sums) if value >= WEIGHT_SUM_LIMIT) - 1
            _refuse(
                field,
                f"the weights up to vertex {first + at} add up to 2^62 or more; scale them so that their sum "
                "stays below",
            )
        total = heavier
    return len(weights)


def check_names(data: Buffer, field: str) -> int:
    """Return the number of names: UTF-8, each ended by a line feed and free of control characters."""
    view = memoryview(data)
    decoder = codecs.getincrementaldecoder("utf-8")()
    count = 0
    for piece in _pieces(view):
        kept = len(decoder.getstate()[0])
        try:
            text = decoder.decode(piece)
        except UnicodeDecodeError as error:
            row = count + piece[: max(0, error.start - kept)].count(b"\n")
            _refuse(field, f"name {row} is not UTF-8: {error.reason}; encode names as UTF-8")
        _check_characters(text, count, field)
        count += text.count("\n")
    if decoder.getstate()[0]:
        _refuse(field, f"name {count} is not UTF-8: it ends in the middle of a character")
    if len(view) and view[-1] != 0x0A:
        _refuse(field, f"name {count} (the last) is not ended by a line feed; end every name with one")
    return count


def _pieces(view: memoryview) -> Iterator[bytes]:
    for first in range(0, len(view), _PIECE):
        yield bytes(view[first : first + _PIECE])


def _check_characters(text: str, count: int, field: str) -> None:
    if text.replace("\n", "").isprintable():
        return
    row = count
    for character in text:
        if character == "\n":
            row += 1
        elif ord(character) < 0x20 or 0x7F <= ord(character) < 0xA0:
            _refuse(field, f"name {row} holds the control character U+{ord(character):04X}; remove it")
