"""The questions that a solve can answer, one module each."""

from nearchord_solve.questions.clique import Clique
from nearchord_solve.questions.colourable_subgraph import ColourableSubgraph
from nearchord_solve.questions.colouring import Colouring
from nearchord_solve.questions.fill import Fill
from nearchord_solve.questions.fractional_colouring import FractionalColouring
from nearchord_solve.questions.independent_set import IndependentSet
from nearchord_solve.questions.induced_forest import InducedForest
from nearchord_solve.questions.structure import Structure
from nearchord_solve.questions.vertex_cover import VertexCover

Question = (
    IndependentSet
    | VertexCover
    | Clique
    | ColourableSubgraph
    | InducedForest
    | Colouring
    | FractionalColouring
    | Fill
    | Structure
)

QUESTIONS: dict[str, type[Question]] = {
    "independent-set": IndependentSet,
    "vertex-cover": VertexCover,
    "clique": Clique,
    "colourable-subgraph": ColourableSubgraph,
    "induced-forest": InducedForest,
    "colouring": Colouring,
    "fractional-colouring": FractionalColouring,
    "fill": Fill,
    "structure": Structure,
}

__all__ = [
    "QUESTIONS",
    "Clique",
    "ColourableSubgraph",
    "Colouring",
    "Fill",
    "FractionalColouring",
    "IndependentSet",
    "InducedForest",
    "Question",
    "Structure",
    "VertexCover",
]
