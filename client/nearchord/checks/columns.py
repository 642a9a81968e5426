"""Columns of an answer, taken only in the form that the contract gives them."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.checks.edges import Ints
from nearchord.errors import CheckFailed


def column_of(answer: Answer, name: str, kind: type[np.generic]) -> Ints:
    """The column as int64; CheckFailed unless it is there, flat and of the type `kind`."""
    column = answer.columns.get(name)
    if column is None or column.ndim != 1 or column.dtype != kind:
        raise CheckFailed(f"the answer has no column {name} of one dimension and type {np.dtype(kind)}")
    found: Ints = column.astype(np.int64)
    return found


def numbers_of(answer: Answer, name: str, size: int) -> Ints:
    """A column of so many whole numbers; CheckFailed when it is missing or has another size."""
    column = column_of(answer, name, np.int64)
    if column.size != size:
        raise CheckFailed(f"the column {name} has {column.size} entries instead of {size}")
    return column


def lists_of(answer: Answer, start: str, entries: str, count: int) -> list[NDArray[np.uint32]]:
    """A column of vertices or colours cut into so many lists, some of which may be empty; CheckFailed where the cuts
    are wrong."""
    cuts, column = numbers_of(answer, start, count + 1), column_of(answer, entries, np.uint32).astype(np.uint32)
    if int(cuts[0]) != 0 or int(cuts[-1]) != column.size or bool((np.diff(cuts) < 0).any()):
        raise CheckFailed(f"the column {start} does not ascend from 0 to {column.size}")
    return np.split(column, cuts[1:-1])[:count]
