"""What callers give for a graph, checked: pairs, columns of endpoints, weights, names; and arrays as bytes."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.errors import BadInput

Ints = NDArray[np.int64]
LARGEST_N = 2**32 - 1
WEIGHT_LIMIT = 2**62
PAIR_REMEDY = "give pairs of vertex numbers, such as [(0, 1), (1, 2)]"


def pair_array(edges: Any) -> NDArray[Any]:
    """`edges` as an array of shape (m, 2), or an empty one; BadInput when they are no pairs."""
    try:
        pairs = np.asarray(edges)
    except ValueError:  # rows of different lengths
        place = next(i for i, edge in enumerate(edges) if not hasattr(edge, "__len__") or len(edge) != 2)
        raise BadInput(f"edge {place} ({edges[place]!r}) is no pair", PAIR_REMEDY) from None
    if pairs.size and (pairs.ndim != 2 or pairs.shape[1] != 2):
        raise BadInput(f"edges have the shape {pairs.shape}", PAIR_REMEDY)
    return pairs


def endpoint_column(column: Any, name: str) -> NDArray[Any]:
    """`column` as integers[m]; BadInput when it is not one-dimensional or not of whole numbers below 2^63."""
    array = np.asarray(column)
    if array.size == 0:
        return np.zeros(0, np.int64)
    if array.ndim != 1 or array.dtype.kind not in "iu":
        raise BadInput(
            f"{name} is not a one-dimensional array of whole numbers (dtype {array.dtype}, {array.ndim} dimensions)",
            "give vertex numbers from 0; for named vertices use from_networkx, or map the names to numbers first",
        )
    return _as_int64(array, name) if array.dtype == np.uint64 else array


def _as_int64(array: NDArray[Any], name: str) -> Ints:
    if int(array.max()) >= 2**63:
        place = int(array.argmax())
        raise BadInput(
            f"{name}[{place}] is {array[place]}, which is out of range", "give vertex numbers from 0 to n - 1"
        )
    return array.astype(np.int64, copy=False)


def vertex_count(n: Any) -> int:
    """`n` as an int that the canonical form can hold; BadInput otherwise."""
    if isinstance(n, bool) or not isinstance(n, int | np.integer) or not 0 <= n <= LARGEST_N:
        raise BadInput(f"n = {n!r} is not a number of vertices", f"give a whole number from 0 to {LARGEST_N}")
    return int(n)


def weight_vector(n: int, weights: Any, what: str = "weight") -> NDArray[np.int64]:
    """`weights` as read-only int64[n]; BadInput when one is negative or broken, or their sum reaches 2^62.

    `what` is what messages call one of them.
    """
    array = np.asarray(weights)
    if array.shape != (n,):
        raise BadInput(f"{what}s have shape {array.shape}, but the graph has {n} vertices", f"give {n} {what}s")
    whole = _whole_weights(array, what)
    if n and int(whole.min()) < 0:
        place = int((whole < 0).argmax())
        raise BadInput(f"{what} {place} is {whole[place]}, which is negative", f"give {what}s of at least 0")
    if n and int(whole.max()) * n >= WEIGHT_LIMIT and weight_sum(whole) >= WEIGHT_LIMIT:
        raise BadInput(f"the {what}s add up to 2^62 or more", f"count in a larger unit: divide all {what}s")
    result = np.array(whole, np.int64)
    result.flags.writeable = False
    return result


def _whole_weights(array: NDArray[Any], what: str) -> NDArray[np.int64]:
    if array.size == 0:
        return np.zeros(0, np.int64)
    if array.dtype.kind == "i":
        return array.astype(np.int64, copy=False)
    if array.dtype.kind not in "uOf":
        raise BadInput(f"{what}s have dtype {array.dtype}", "give whole numbers")
    listed = enumerate(array.tolist())
    return np.fromiter((_whole_weight(place, weight, what) for place, weight in listed), np.int64, array.size)


def _whole_weight(place: int, weight: Any, what: str) -> int:
    if isinstance(weight, float) and weight.is_integer():
        weight = int(weight)
    if isinstance(weight, bool) or not isinstance(weight, int | np.integer):
        raise BadInput(
            f"{what} {place} is {weight!r}, which is not a whole number",
            f"multiply all {what}s by a power of ten that makes them whole",
        )
    if weight >= WEIGHT_LIMIT:
        raise BadInput(
            f"{what} {place} is {weight}, which is 2^62 or more", f"count in a larger unit: divide all {what}s"
        )
    return max(int(weight), -(2**62))


def weight_sum(weights: NDArray[np.int64]) -> int:
    """Exact sum of int64 weights, whose own sum in int64 might overflow."""
    upper, lower = weights >> np.int64(31), weights & np.int64(2**31 - 1)
    return (int(upper.sum()) << 31) + int(lower.sum())


def name_tuple(n: int, names: Any) -> tuple[str, ...]:
    """`names` as n different, non-empty words without control characters; BadInput otherwise."""
    words = tuple(names)
    if len(words) != n:
        raise BadInput(f"{len(words)} names were given for {n} vertices", f"give {n} names")
    for place, word in enumerate(words):
        if not isinstance(word, str) or not word or not word.isprintable():
            raise BadInput(f"name {place} is {word!r}", "give non-empty text without control characters")
    if len(set(words)) < n:
        _name_twice(words)
    return words


def _name_twice(words: tuple[str, ...]) -> None:
    seen: dict[str, int] = {}
    for place, word in enumerate(words):
        if word in seen:
            raise BadInput(
                f"name {place} ({word!r}) is the name of vertex {seen[word]} too", "give every vertex its own"
            )
        seen[word] = place


def little_endian(array: NDArray[Any]) -> memoryview:
    """The bytes of a one-dimensional array in little-endian order, without a copy where the machine has that order."""
    ordered: NDArray[Any] = np.ascontiguousarray(array, array.dtype.newbyteorder("<"))
    return ordered.view(np.uint8).data
