"""What colour classes and forests share: pins, the flow, and the columns of the answer.

``never`` vertices leave the graph.  Whether the ``must`` vertices can be chosen together depends on no other vertex
and is settled first, so that a conflict among them is named; then the sweep looks for choices that hold all of them.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.conclude import contradiction, infeasible, outcome_of
from nearchord_solve.questions.frame import Concluded, run_program
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Found, Task
from nearchord_solve.questions.label_program import LabelledProgram
from nearchord_solve.questions.pins import Contradiction, Rest, keep_vertices, lift
from nearchord_solve.questions.together import Conflict, choose_together


@dataclass(frozen=True, eq=False)
class Asked:
    """A question about colours or forests: ``colours`` 0 means forests; pins are ascending arrays."""

    colours: int
    must: I64
    never: I64


def answer_labelled(
    asked: Asked, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
) -> Outcome:  # fmt: skip
    """Answer for checked arguments."""
    both = np.intersect1d(asked.must, asked.never)
    if both.size:
        pins = Contradiction(int(both[0]), int(both[0]))
        return contradiction(pins, "must be chosen", "must not be chosen")
    start = choose_together(graph, asked.must, asked.colours, budget, monitor)
    if isinstance(start, Conflict):
        return infeasible(start.reason(asked.colours))
    stays = np.ones(graph.n, bool)
    stays[asked.never] = False
    rest = keep_vertices(graph, weights, stays, np.empty(0, np.int64))
    must = np.searchsorted(rest.vertices, asked.must)
    program = LabelledProgram(asked.colours, must, None if start is None else start[rest.vertices])
    whole = reuse if rest.graph is graph else None
    ended = run_program(Task(rest.graph, rest.weights, budget, when_over, Gauge(monitor, 0, 1), whole), program)
    return _conclude(ended, rest, asked.colours)


def _conclude(ended: Concluded, rest: Rest, colours: int) -> Outcome:
    found = ended.found
    columns: Mapping[str, U32] = {}
    if found.verdict is Verdict.INFEASIBLE:
        what = f"need more than {colours} colours" if colours else "close a cycle"
        reason = f"the pins contradict each other: the vertices that must be chosen {what}"
        found = Found(Verdict.INFEASIBLE, None, None, None, found.structure, reason)
    elif found.chosen is not None and colours and ended.colour is not None:
        columns = {"colour": ended.colour[found.chosen != 0]}
    outcome = outcome_of(found, 0, 1, lambda chosen: lift(rest, chosen), rest.vertices)
    return replace(outcome, states=ended.states, columns=columns)
