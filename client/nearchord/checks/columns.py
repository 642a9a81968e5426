"""Columns of an answer, taken only in the form that the contract gives them."""

from __future__ import annotations

import numpy as np

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
