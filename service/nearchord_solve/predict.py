"""What an exact answer to each question would take on a graph of known structure."""

from nearchord_solve.budget import Budget
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Prediction
from nearchord_solve.structure import Structure


def predict(structure: Structure, budget: Budget, monitor: Monitor) -> tuple[Prediction, ...]:
    return ()
