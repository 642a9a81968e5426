"""nearchord_solve: exact answers about nearly chordal conflict graphs.

Pure: arrays in, answers out; no clock, file, log or network.  The caller counts the seconds and writes the
monitor's STOP cell.
"""

from .budget import Budget
from .errors import GraphError, SolverError
from .graph import Graph
from .memory import predicted_bytes
from .monitor import Monitor, Phase, Stop
from .outcome import Outcome, Verdict
from .questions import QUESTIONS, IndependentSet, VertexCover
from .solving import solve
from .warm import warm_up

VERSION = "0.1.0"

__all__ = [
    "QUESTIONS",
    "VERSION",
    "Budget",
    "Graph",
    "GraphError",
    "IndependentSet",
    "Monitor",
    "Outcome",
    "Phase",
    "SolverError",
    "Stop",
    "Verdict",
    "VertexCover",
    "predicted_bytes",
    "solve",
    "warm_up",
]
