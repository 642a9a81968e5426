"""How kernels are compiled, and the array types they speak about.

``kernel`` compiles on first call for the exact types it is given; ``warm_up`` makes that first call with the
production types, and numba's disk cache keeps the result.  Integer arithmetic wraps modulo 2**64 as in C.
"""

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba
from numba.core import types
from numba.extending import intrinsic
from numpy.typing import NDArray

F = TypeVar("F", bound=Callable[..., Any])

# Inside kernels an element of any integer array is a plain integer; the names say the dtype to people.
I32 = NDArray[Any]
I64 = NDArray[Any]
U8 = NDArray[Any]
U32 = NDArray[Any]
U64 = NDArray[Any]


def kernel(function: F) -> F:
    """Compile ``function`` without the interpreter lock, cached on disk."""
    return cast(F, numba.njit(nogil=True, cache=True)(function))


def _ones(_context: Any, _word: Any) -> Any:
    def generate(_target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
        return builder.ctpop(arguments[0])

    return types.int64(types.uint64), generate


def _lowest(_context: Any, _word: Any) -> Any:
    def generate(target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
        return builder.cttz(arguments[0], target.get_constant(types.boolean, 1))

    return types.int64(types.uint64), generate


ones: Callable[[Any], int] = cast(Any, intrinsic(_ones))
"""Number of set bits of a uint64 word."""

lowest: Callable[[Any], int] = cast(Any, intrinsic(_lowest))
"""Index of the lowest set bit of a uint64 word that is not zero."""
