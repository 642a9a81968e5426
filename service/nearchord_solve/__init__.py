"""nearchord_solve: exact answers about nearly chordal conflict graphs.

Pure: arrays in, answers out; no clock, file, log or network.  The caller counts the seconds and writes the
monitor's STOP cell.
"""

from nearchord_solve.budget import Budget
from nearchord_solve.errors import GraphError, SolverError
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Kept
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Monitor, Phase, Stop
from nearchord_solve.outcome import Outcome, Prediction, Recognition, StructureReport, Verdict
from nearchord_solve.questions import (
    QUESTIONS,
    Clique,
    ColourableSubgraph,
    Colouring,
    Fill,
    FractionalColouring,
    IndependentSet,
    InducedForest,
    Structure,
    VertexCover,
)
from nearchord_solve.solving import solve
from nearchord_solve.warm import WARM_PARTS, warm_up

VERSION = "0.1.0"

__all__ = [
    "QUESTIONS",
    "VERSION",
    "WARM_PARTS",
    "Budget",
    "Clique",
    "ColourableSubgraph",
    "Colouring",
    "Fill",
    "FractionalColouring",
    "Graph",
    "GraphError",
    "IndependentSet",
    "InducedForest",
    "Kept",
    "Monitor",
    "Outcome",
    "Phase",
    "Prediction",
    "Recognition",
    "SolverError",
    "Stop",
    "Structure",
    "StructureReport",
    "Verdict",
    "VertexCover",
    "predicted_bytes",
    "solve",
    "warm_up",
]
