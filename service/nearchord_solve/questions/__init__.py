"""The questions that a solve can answer, one module each."""

from nearchord_solve.questions.independent_set import IndependentSet
from nearchord_solve.questions.vertex_cover import VertexCover

QUESTIONS: dict[str, type[IndependentSet] | type[VertexCover]] = {
    "independent-set": IndependentSet,
    "vertex-cover": VertexCover,
}

__all__ = ["QUESTIONS", "IndependentSet", "VertexCover"]
