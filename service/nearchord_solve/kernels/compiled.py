"""How kernels are compiled, and the array types they speak about.

``kernel`` compiles on first call for the exact types it is given; ``warm_up`` makes that first call with the
production types, and numba's disk cache keeps the result.  Integer arithmetic wraps modulo 2**64 as in C.
"""

from collections.abc import Callable
from typing import Any, TypeVar, cast

import numba
from numba.core import cgutils, types
from numba.extending import intrinsic
from numba.np.arrayobj import make_array
from numpy.typing import NDArray

F = TypeVar("F", bound=Callable[..., Any])
_KERNEL: dict[str, Any] = {"nogil": True, "cache": True, "no_cfunc_wrapper": True}

# Inside kernels an element of any integer array is a plain integer; the names say the dtype to people.
I32 = NDArray[Any]
I64 = NDArray[Any]
U8 = NDArray[Any]
U32 = NDArray[Any]
U64 = NDArray[Any]


def kernel(function: F) -> F:
    """Compile ``function`` without the interpreter lock, cached on disk; without an entry for C, which nobody uses."""
    return cast(F, numba.njit(**_KERNEL)(function))


def inlined(function: F) -> F:
    """Write ``function`` out wherever a kernel calls it, instead of compiling it by itself.

    numba compiles what a kernel calls once more with each kernel that calls it, at every level.  For steps of a
    pass, which have one or two callers, that is most of the time of a cold start.
    """
    return cast(F, numba.njit(nogil=True, inline="always")(function))


def _ones(_context: Any, _word: Any) -> Any:
    def generate(_target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
        return builder.ctpop(arguments[0])

    return types.int64(types.uint64), generate


def _lowest(_context: Any, _word: Any) -> Any:
    def generate(target: Any, builder: Any, _signature: Any, arguments: Any) -> Any:
        return builder.cttz(arguments[0], target.get_constant(types.boolean, 1))

    return types.int64(types.uint64), generate


def _prefetch(_context: Any, array: Any, index: Any) -> Any:
    layout: Any = make_array
    forms: Any = cgutils

    def generate(target: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        begin = layout(signature.args[0])(target, builder, arguments[0]).data
        byte = builder.bitcast(builder.gep(begin, [arguments[1]]), forms.voidptr_t)
        word = forms.int32_t
        wanted = forms.ir.FunctionType(forms.ir.VoidType(), [byte.type, word, word, word])
        instruction = builder.module.declare_intrinsic("llvm.prefetch", [byte.type], wanted)
        builder.call(instruction, [byte, word(0), word(3), word(1)])  # to be read, all cache levels, data
        return target.get_dummy_value()

    return types.none(array, types.int64), generate


prefetch: Callable[[Any, int], None] = cast(Any, intrinsic(_prefetch))
"""Bring the cache line of the element at an index, counted in row-major order, without waiting for it.

Changes nothing; an index outside the array is harmless.
"""

ones: Callable[[Any], int] = cast(Any, intrinsic(_ones))
"""Number of set bits of a uint64 word."""

lowest: Callable[[Any], int] = cast(Any, intrinsic(_lowest))
"""Index of the lowest set bit of a uint64 word that is not zero."""
