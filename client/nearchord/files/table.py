"""Whole columns of numbers out of the bytes of a file, in numpy: no line is touched one by one.

A line loop takes about a second for a million edges; this takes about a tenth. Whatever is not plain decimal digits is
left to the caller's exact, slow path.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

BLANKS = b" \t\r\v\f"
NOTHING = 32
"""Kind of a blank line: a byte that, being blank, begins no other."""
LONGEST = 10
"""Digits of the largest number that can be a vertex."""
BLOCK_LINES = 1 << 16
"""Lines read at a time: few enough for the caches, many enough that Python does not count."""


@dataclass(frozen=True)
class Lines:
    """The lines of a file; line i is entry i - 1.

    `begin` is where the first byte that is not blank stands, `end` where the line ends (its line feed, or the end of
    the file), `kind` that first byte, NOTHING for a blank line.
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
    while (indented := np.flatnonzero(blank[kind] & (begin < end))).size:
        begin[indented] += 1
        kind[indented] = _kinds(buffer, begin[indented], end[indented])
    return Lines(buffer, begin, end, kind)


def _kinds(buffer: NDArray[np.uint8], begin: NDArray[np.int64], end: NDArray[np.int64]) -> NDArray[np.uint8]:
    """First bytes; NOTHING where a line is empty."""
    kind = np.full(len(begin), NOTHING, np.uint8)
    full = begin < end
    kind[full] = buffer[begin[full]]
    return kind


def two_columns(lines: Lines, chosen: NDArray[np.int64]) -> NDArray[np.int64] | None:
    """The two numbers behind the first byte of every chosen line, int64[len(chosen), 2].

    None unless every chosen line is its one-byte kind, a blank, and two blank-separated numbers of at most LONGEST
    plain digits.
    """
    pairs = np.zeros((len(chosen), 2), np.int64)
    for start in range(0, len(chosen), BLOCK_LINES):
        block = slice(start, start + BLOCK_LINES)
        if not _read_block(lines, chosen[block], pairs[block]):
            return None
    return pairs


def _read_block(lines: Lines, chosen: NDArray[np.int64], pairs: NDArray[np.int64]) -> bool:
    """Overwrites `pairs` with the numbers of neighbouring chosen lines; False when they are not plain."""
    window, origin = _window(lines, chosen)
    digit = (window - np.uint8(48)) < 10
    if not bool((digit | (window == 32) | (window == 10)).all()):
        return False
    change = np.flatnonzero(digit[1:] != digit[:-1]) + 1  # the window begins without a digit: begin, end, begin, ...
    first, last = change[0::2], change[1::2]
    if len(last) < len(first):
        last = np.append(last, len(window))
    if len(first) != pairs.size or not _two_each(first, lines.begin[chosen] - origin, lines.end[chosen] - origin):
        return False
    width = last - first
    if int(width.max()) > LONGEST:
        return False
    pairs.reshape(-1)[:] = _values(window, last, width)
    return True


def _window(lines: Lines, chosen: NDArray[np.int64]) -> tuple[NDArray[np.uint8], int]:
    """A copy of the bytes from the first to the last chosen line and where it begins.

    Lines between that are not chosen, the kinds of those that are, and all blanks but line feeds are spaces in it.
    """
    origin = int(lines.begin[chosen[0]])
    window = lines.buffer[origin : int(lines.end[chosen[-1]])].copy()
    for blank in BLANKS[1:]:
        window[window == blank] = 32
    gap = np.flatnonzero(np.diff(chosen) > 1)
    for begin, end in zip(lines.end[chosen[gap]].tolist(), lines.begin[chosen[gap + 1]].tolist(), strict=True):
        window[begin - origin : end - origin] = 32
    window[lines.begin[chosen] - origin] = 32
    return window, origin


def _two_each(first: NDArray[np.int64], begin: NDArray[np.int64], end: NDArray[np.int64]) -> bool:
    """Whether numbers 2i and 2i + 1 stand in line i, a blank away from its kind, for all i."""
    apart = bool((first[0::2] >= begin + 2).all())
    return apart and bool((first[1::2] < end).all())


def _values(window: NDArray[np.uint8], last: NDArray[np.int64], width: NDArray[np.int64]) -> NDArray[np.int64]:
    """Numbers whose `width` digits, at least one, end before `last`."""
    values = window[last - 1].astype(np.int64) - 48
    for place in range(1, int(width.max())):
        there = np.flatnonzero(width > place)
        values[there] += (window[last[there] - 1 - place].astype(np.int64) - 48) * 10**place
    return values
