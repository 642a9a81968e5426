"""The checker: confirms an answer from the graph and the definition of the question, sharing no code with the solver."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer
from nearchord.canonical import weight_sum
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.question import IndependentSet, Question, VertexCover


@dataclass(frozen=True)
class Confirmed:
    """What a check confirmed and what it could not, each in words."""

    what: tuple[str, ...]
    not_confirmed: tuple[str, ...]


def check(graph: Graph, answer: Answer) -> Confirmed:
    """Confirms choice, value and, where it is plain, bound of `answer`; raises CheckFailed naming the place.

    Time and memory O(n + m).
    """
    raise NotImplementedError


__all__ = ["Confirmed", "check"]
_ = (np, NDArray, weight_sum, CheckFailed, Question, IndependentSet, VertexCover)
