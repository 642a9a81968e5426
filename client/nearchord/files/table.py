"""Whole columns of numbers out of the bytes of a file, in numpy: no line is touched one by one.

A line loop takes about a second for a million edges; this takes about a tenth. Whatever is not plain decimal digits is
left to the caller's exact, slow path.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

BLANKS = b" \t\r\v\f"
LONGEST = 10
"""Digits of the largest number that can be a vertex."""


@dataclass(frozen=True)
class Lines:
    """The lines of a file; line i is entry i - 1.

    `begin` is where the first byte that is not blank stands, `end` where the line ends (its line feed, or the end of
    the file), `kind` that first byte, 0 for a blank line.
    """

    buffer: NDArray[np.uint8]
    begin: NDArray[np.int64]
    end: NDArray[np.int64]
    kind: NDArray[np.uint8]

    def text(self, line: int) -> str:
        """The text of an entry."""
        return self.buffer[self.begin[line] : self.end[line]].tobytes().decode()


def split(data: bytes) -> Lines:
    """The lines of `data`. Time and memory O(bytes)."""
    buffer = np.frombuffer(data, np.uint8)
    feeds = np.flatnonzero(buffer == 10)
    end = feeds if not data or data.endswith(b"\n") else np.append(feeds, len(buffer))
    begin = np.zeros(len(end), np.int64)
    begin[1:] = feeds[: max(0, len(end) - 1)] + 1
    blank = np.zeros(256, np.bool_)
    blank[list(BLANKS)] = True
    kind = _kinds(buffer, begin, end)
    while (indented := np.flatnonzero(blank[kind])).size:
        begin[indented] += 1
        kind[indented] = _kinds(buffer, begin[indented], end[indented])
    return Lines(buffer, begin, end, kind)


def _kinds(buffer: NDArray[np.uint8], begin: NDArray[np.int64], end: NDArray[np.int64]) -> NDArray[np.uint8]:
    """First bytes; 0 where a line is empty."""
    kind = np.zeros(len(begin), np.uint8)
    full = begin < end
    kind[full] = buffer[begin[full]]
    return kind


def two_columns(lines: Lines, chosen: NDArray[np.int64]) -> NDArray[np.int64] | None:
    """The two numbers behind the first byte of every chosen line, int64[len(chosen), 2].

    None unless every chosen line is its one-byte kind, a blank, and two blank-separated numbers of at most LONGEST
    plain digits.
    """
    begin, end = lines.begin[chosen], lines.end[chosen]
    buffer = _only(lines, chosen)
    digit = (buffer - np.uint8(48)) < 10
    if not bool((digit | (buffer == 32) | (buffer == 10)).all()):
        return None
    change = np.flatnonzero(digit[1:] != digit[:-1]) + 1  # no digit is first, so changes alternate: begin, end
    first, last = change[0::2], change[1::2]
    if len(last) < len(first):
        last = np.append(last, len(buffer))
    if len(first) != 2 * len(chosen) or not _two_each(first, begin, end):
        return None
    width = last - first
    if len(width) and int(width.max()) > LONGEST:
        return None
    return _values(buffer, last, width).reshape(-1, 2)


def _only(lines: Lines, chosen: NDArray[np.int64]) -> NDArray[np.uint8]:
    """A copy of the bytes from the first to the last chosen line (the rest blank) without the kinds."""
    buffer = lines.buffer.copy()
    for blank in BLANKS[1:]:
        buffer[buffer == blank] = 32
    others = np.ones(len(lines.begin), np.bool_)
    others[chosen] = False
    for begin, end in _runs(lines, others):
        buffer[begin:end] = 32
    buffer[lines.begin[chosen]] = 32
    return buffer


def _runs(lines: Lines, member: NDArray[np.bool_]) -> list[tuple[int, int]]:
    """Byte ranges of maximal runs of neighbouring lines that are members."""
    padded = np.zeros(len(member) + 2, np.int8)
    padded[1:-1] = member
    step = np.diff(padded)
    first, last = np.flatnonzero(step == 1), np.flatnonzero(step == -1) - 1
    return list(zip(lines.begin[first].tolist(), lines.end[last].tolist(), strict=True))


def _two_each(first: NDArray[np.int64], begin: NDArray[np.int64], end: NDArray[np.int64]) -> bool:
    """Whether numbers 2i and 2i + 1 stand in line i, a blank away from its kind, for all i."""
    apart = bool((first[0::2] >= begin + 2).all())
    return apart and bool((first[1::2] < end).all())


def _values(buffer: NDArray[np.uint8], last: NDArray[np.int64], width: NDArray[np.int64]) -> NDArray[np.int64]:
    """Numbers whose `width` digits end before `last`."""
    values = np.zeros(len(last), np.int64)
    for place in range(int(width.max(initial=0))):
        there = width > place
        digits = buffer[np.where(there, last - 1 - place, 0)].astype(np.int64) - 48
        values += np.where(there, digits, 0) * 10**place
    return values
