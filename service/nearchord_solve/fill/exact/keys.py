"""Numbers that stand for sets and cycles when they are compared in bulk."""

import numpy as np

from nearchord_solve.arrays import U64


def mixed(words: U64) -> U64:
    """A one-to-one mixing of 64-bit words."""
    for factor, shift in ((0xBF58476D1CE4E5B9, 30), (0x94D049BB133111EB, 27)):
        words = (words ^ words >> np.uint64(shift)) * np.uint64(factor)
    return words ^ words >> np.uint64(31)


def row_keys(rows: U64) -> U64:
    """A number for each row, the same for the same rows."""
    keys: U64 = mixed(rows + np.arange(1, rows.shape[1] + 1, dtype=np.uint64)).sum(axis=1, dtype=np.uint64)
    return keys
