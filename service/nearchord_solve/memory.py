"""Memory of a solve, predicted."""

import numpy as np

from nearchord_solve.arrays import I64

PER_EDGE = 20  # rows as read 4, symmetric rows 8, elimination lists 4, their twin while an index is taken 4
PER_VERTEX = 120
ALWAYS = 2**20
FILL_ROOM = 10**7  # H = G + fill may have 3m + this many edges


def predicted_bytes(n: int, m: int) -> int:
    """Peak of the arrays of a plain solve of n vertices and m edges, its canonical rows included.

    Beyond what the process holds before; fill and tables of fill cores come on top and are predicted when they
    are known.
    """
    return ALWAYS + PER_VERTEX * n + PER_EDGE * m


def quotient_bytes(n: int, m: int) -> int:
    """What ordering by minimum degree needs on top, before its cliques grow."""
    return 48 * n + 16 * m


def table_bytes(entries: I64) -> I64:
    """Memory of so many table entries: label 4, end 8 and value 8 bytes."""
    return np.asarray(entries, np.int64) * 20


def search_bytes(n: int, entries: int, fill: int) -> int:
    """What the exact search needs for one part of n vertices, ``entries`` in its rows, and so much fill known.

    Eight matrices of n * n bits, lists of neighbours, and fills of eight candidates.
    """
    return n * n + 4 * entries + 64 * fill


def kept_bytes(n: int) -> int:
    """What the search keeps of a part until all are done: two matrices of bits."""
    return n * n // 4


def state_bytes(states: int) -> int:
    """Memory of states of colour classes and forests: what their messages keep, about 96 bytes a state.

    The tables on the reference graphs held from a quarter of that to two and a half times as much, and less where many
    states send the same message, as they share an entry.
    """
    return states * 96


def most_fill(n: int, m: int, memory: int) -> int:
    """Fill edges that an elimination order of the whole graph may have within ``memory`` bytes."""
    return min(2 * m + FILL_ROOM, max(0, memory - predicted_bytes(n, m)) // 12)
