"""Sets as words: bit i & 63 of word i >> 6 says that i is in."""

import numpy as np

from nearchord_solve.kernels.compiled import U64, kernel

ONE = np.uint64(1)


@kernel
def clear(words: U64, i: int) -> None:
    """Take i out."""
    words[i >> 6] &= ~(ONE << np.uint64(i & 63))


@kernel
def holds(words: U64, i: int) -> bool:
    """Whether i is in."""
    return bool((words[i >> 6] >> np.uint64(i & 63)) & ONE)


@kernel
def full(count: int, words: int) -> U64:
    """The set of 0..count-1."""
    everything = np.zeros(words, np.uint64)
    for i in range(count):
        everything[i >> 6] |= ONE << np.uint64(i & 63)
    return everything
