"""Lists of different lengths, one after the other: list i is ``values[start[i]:start[i+1]]``."""

import numpy as np

from nearchord_solve.arrays import I32, I64


def starts(sizes: I64) -> I64:
    """Where each of the lists of these sizes begins, and where the last one ends."""
    found = np.zeros(sizes.size + 1, np.int64)
    np.cumsum(sizes, out=found[1:])
    return found


def picked(start: I64, lists: I64 | I32) -> tuple[I64, I64]:
    """Starts of some of the lists put together, and the places of their values in the old array."""
    sizes = start[1:][lists] - start[lists]
    fresh = starts(sizes)
    return fresh, np.arange(fresh[-1]) + np.repeat(start[lists] - fresh[:-1], sizes)


def chained(first: I64, second: I64) -> I64:
    """Starts of lists followed by others."""
    return np.concatenate((first, second[1:] + first[-1]))
