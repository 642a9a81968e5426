"""The one entry to all questions."""

from dataclasses import replace

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.errors import SolverError
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Kept, Reuse
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.outcome import Outcome
from nearchord_solve.questions import Question

MOST_WEIGHT = 2**62  # sums of weights stay below, so that sums and differences of two fit int64


def solve(
    question: Question,
    graph: Graph,
    weights: I64 | None,
    budget: Budget,
    when_over: str,
    monitor: Monitor,
    kept: Kept | None = None,
) -> Outcome:
    """Answer ``question`` about ``graph`` within ``budget``.

    ``weights`` int64[n], non-negative, sum below 2**62; None for all ones; int64[R, n], and not None, where the
    question has R >= 1 scenarios.  ``when_over``: "bound" to go on with bounds when the fill or state budget does not
    suffice, "stop" to end there.  A STOP written to the monitor's cells ends the solve soon: SECONDS with the best
    feasible choice and a valid bound, CANCEL with nothing.  ``kept``: what an earlier outcome on the same graph left; it saves time and changes nothing else.
    Same arguments, same answer, unless stopped.  Raises SolverError for bad arguments.
    O(n + m) outside fill cores; inside, as their states.
    """
    if when_over not in ("bound", "stop"):
        raise SolverError("when_over", f"must be 'bound' or 'stop', not {when_over!r}")
    checked = check_weights(weights, graph.n, getattr(question, "scenarios", 0))
    monitor.enter(Phase.READ)
    if kept is not None and (kept.n, kept.m) != (graph.n, graph.m):
        raise SolverError("kept", f"is of a graph of {kept.n} vertices and {kept.m} edges")
    reuse = Reuse(kept)
    outcome = question.answer(graph, checked, budget, when_over, monitor, reuse)
    monitor.enter(Phase.DONE)
    return replace(outcome, kept=reuse.made)


def check_weights(weights: I64 | None, n: int, scenarios: int = 0) -> I64:
    """Weights as a contiguous read-only int64 array; SolverError names the first bad vertex.

    With ``scenarios`` there is a row of weights for each of them.
    """
    shape = (scenarios, n) if scenarios > 0 else (n,)
    if weights is None:
        if scenarios > 0:
            raise SolverError("weights", f"are needed for the {scenarios} scenarios")
        weights = np.ones(n, np.int64)
    if weights.dtype != np.int64 or weights.shape != shape:
        expected = " x ".join(map(str, shape))
        raise SolverError("weights", f"must be an int64 array of {expected}, got {weights.dtype.name}{weights.shape}")
    if n and weights.min() < 0:
        at = np.unravel_index(int(np.argmax(weights < 0)), shape)
        raise SolverError("weights", f"{_place(at)}: weight {weights[at]} is negative")
    if n and int(weights.max()) * n >= MOST_WEIGHT:
        for row in weights.reshape(-1, n):
            if sum(row.tolist()) >= MOST_WEIGHT:
                raise SolverError("weights", "must sum to less than 2**62")
    plain = np.require(weights, requirements=["C", "A"]).view()
    plain.flags.writeable = False
    return plain


def _place(at: tuple[np.intp, ...]) -> str:
    """The vertex, and scenario if there are some, that an index means."""
    vertex = f"vertex {at[-1]}"
    return vertex if len(at) == 1 else f"scenario {at[0]}, {vertex}"
