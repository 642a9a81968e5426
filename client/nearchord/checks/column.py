"""Columns of an answer, taken only in the form that the contract gives them."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.checks.edges import Ints
from nearchord.errors import CheckFailed


def numbers(answer: Answer, name: str, size: int | None = None) -> Ints:
    """A column of whole numbers as int64; CheckFailed when it is missing or has another size."""
    found: Ints = _column(answer, name, np.int64, size).astype(np.int64)
    return found


def vertices(answer: Answer, name: str) -> NDArray[np.uint32]:
    """A column of vertices or colours; CheckFailed when it is missing."""
    return _column(answer, name, np.uint32, None)


def _column(answer: Answer, name: str, kind: type[np.generic], size: int | None) -> NDArray[Any]:
    column = answer.columns.get(name)
    if column is None or column.ndim != 1 or column.dtype != kind:
        raise CheckFailed(f"the answer has no column {name} of one dimension and type {np.dtype(kind)}")
    if size is not None and column.size != size:
        raise CheckFailed(f"the column {name} has {column.size} entries instead of {size}")
    return column


def lists(answer: Answer, start: str, entries: str, count: int) -> list[NDArray[np.uint32]]:
    """A column of vertices cut into so many lists, some of which may be empty; CheckFailed where the cuts are wrong."""
    cuts, column = numbers(answer, start, count + 1), vertices(answer, entries)
    if int(cuts[0]) != 0 or int(cuts[-1]) != column.size or bool((np.diff(cuts) < 0).any()):
        raise CheckFailed(f"the column {start} does not ascend from 0 to {column.size}")
    return np.split(column, cuts[1:-1])[:count]
