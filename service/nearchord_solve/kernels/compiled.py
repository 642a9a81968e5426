"""How kernels are compiled, and the array types they speak about.

``kernel`` compiles on first call for the exact types it is given; ``warm_up`` makes that first call with the
production types, and numba's disk cache keeps the result.  Integer arithmetic wraps modulo 2**64 as in C.
"""

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba
import numpy as np
from numba.core import types
from numba.extending import intrinsic
from numpy.typing import NDArray

F = TypeVar("F", bound=Callable[..., Any])

I32 = NDArray[np.int32]
I64 = NDArray[np.int64]
U32 = NDArray[np.uint32]
U64 = NDArray[np.uint64]
U8 = NDArray[np.uint8]


def kernel(function: F) -> F:
    """Compile ``function`` without the interpreter lock, cached on disk."""
    return cast(F, numba.njit(nogil=True, cache=True)(function))


@intrinsic
def ones(typing_context, word):  # type: ignore[no-untyped-def]
    """Count the set bits of a uint64 word; result int64."""

    def generate(context, builder, signature, arguments):  # type: ignore[no-untyped-def]
        return builder.ctpop(arguments[0])

    return types.int64(types.uint64), generate


@intrinsic
def lowest(typing_context, word):  # type: ignore[no-untyped-def]
    """Index of the lowest set bit of a non-zero uint64 word; result int64 (undefined for zero)."""

    def generate(context, builder, signature, arguments):  # type: ignore[no-untyped-def]
        return builder.cttz(arguments[0], context.get_constant(types.boolean, 1))

    return types.int64(types.uint64), generate
