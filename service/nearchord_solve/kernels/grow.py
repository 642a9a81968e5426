"""Arrays that grow."""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel


@kernel
def grown32(array: I32, need: int) -> I32:
    """``array``, or a longer copy if it holds fewer than ``need`` entries."""
    if need <= array.shape[0]:
        return array
    longer = np.empty(2 * need, np.int32)
    longer[: array.shape[0]] = array
    return longer


@kernel
def grown64(array: I64, need: int) -> I64:
    """``array``, or a longer copy if it holds fewer than ``need`` entries."""
    if need <= array.shape[0]:
        return array
    longer = np.empty(2 * need, np.int64)
    longer[: array.shape[0]] = array
    return longer


@kernel
def grown8(array: U8, need: int) -> U8:
    """``array``, or a longer copy if it holds fewer than ``need`` entries."""
    if need <= array.shape[0]:
        return array
    longer = np.empty(2 * need, np.uint8)
    longer[: array.shape[0]] = array
    return longer
