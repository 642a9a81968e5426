"""What colour classes and forests share: pins, the flow, add-ons, and the columns of the answer.

``never`` vertices leave the graph.  Whether the ``must`` vertices can be chosen together depends on no other vertex
and is settled first, so that a conflict among them is named; then the sweep looks for choices that hold all of them.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.budget import Budget
from nearchord_solve.errors import SolverError
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.monitor import Monitor, Stop
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.conclude import contradiction, infeasible, outcome_of
from nearchord_solve.questions.frame import Concluded, Settled, run_program
from nearchord_solve.questions.gauge import Gauge
from nearchord_solve.questions.heaviest import Found, Task
from nearchord_solve.questions.label_program import LabelledProgram
from nearchord_solve.questions.pins import Contradiction, Rest, keep_vertices, lift
from nearchord_solve.questions.together import Conflict, choose_together
from nearchord_solve.sweep.independent import as_vertices

Columns = dict[str, U32 | I64]


@dataclass(frozen=True, eq=False)
class Asked:
    """A question about colours or forests: ``colours`` 0 means forests; pins are ascending arrays.

    ``scenarios``: how many vectors of weights there are, 0 for one that is no scenario.
    """

    colours: int
    must: I64
    never: I64
    prices: bool = False
    scenarios: int = 0

    def check(self) -> None:
        """SolverError for add-ons that do not go together."""
        if self.scenarios < 0:
            raise SolverError("question.scenarios", f"must be 0 or more, not {self.scenarios}")
        if self.scenarios and self.prices:
            raise SolverError("question.scenarios", "goes with no other add-on: ask for prices in a job of its own")


def answer_labelled(
    asked: Asked, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
) -> Outcome:  # fmt: skip
    """Answer for checked arguments; ``weights`` int64[R, n] with scenarios."""
    asked.check()
    both = np.intersect1d(asked.must, asked.never)
    if both.size:
        pins = Contradiction(int(both[0]), int(both[0]))
        return contradiction(pins, "must be chosen", "must not be chosen")
    start = choose_together(graph, asked.must, asked.colours, budget, monitor)
    if isinstance(start, Conflict):
        return infeasible(start.reason(asked.colours))
    stays = np.ones(graph.n, bool)
    stays[asked.never] = False
    rest = keep_vertices(graph, weights[0] if asked.scenarios else weights, stays, np.empty(0, np.int64))
    must = np.searchsorted(rest.vertices, asked.must)
    start = None if start is None else start[rest.vertices]
    program = LabelledProgram(asked.colours, must, start, asked.prices)
    whole = reuse if rest.graph is graph else None
    task = Task(rest.graph, rest.weights, budget, when_over, Gauge(monitor, 0, 1), whole)
    ended = run_program(task, program)
    outcome = _conclude(ended, rest, asked.colours)
    if ended.settled is None or outcome.value is None:
        return outcome
    if asked.scenarios:
        return _add_scenarios(outcome, task, program, ended, rest, weights)
    return _add_prices(outcome, ended.settled, rest, graph.n) if asked.prices else outcome


def _conclude(ended: Concluded, rest: Rest, colours: int) -> Outcome:
    """The outcome of what was found: the one place where a proven result becomes an answer."""
    found = ended.found
    columns: Columns = {}
    if found.verdict is Verdict.INFEASIBLE:
        what = f"need more than {colours} colours" if colours else "close a cycle"
        reason = f"the pins contradict each other: the vertices that must be chosen {what}"
        found = Found(Verdict.INFEASIBLE, None, None, None, found.structure, reason)
    elif found.chosen is not None and colours and ended.settled is not None and ended.settled.colour is not None:
        columns = {"colour": ended.settled.colour[found.chosen != 0]}
    outcome = outcome_of(found, 0, 1, lambda chosen: lift(rest, chosen), rest.vertices)
    return replace(outcome, states=ended.states, columns={**outcome.columns, **columns})


def _add_prices(outcome: Outcome, settled: Settled, rest: Rest, n: int) -> Outcome:
    """Prices of all ``n`` vertices; those that must not be chosen cost nothing where they are, and cannot be chosen."""
    if settled.prices is None:
        return replace(outcome, reason=f"{outcome.reason}; without prices: that takes an optimum proven by tables")
    price_in, price_out = np.full(n, -1), np.zeros(n, np.int64)
    price_in[rest.vertices], price_out[rest.vertices] = settled.prices
    return replace(outcome, columns={**outcome.columns, "price_in": price_in, "price_out": price_out})


def _add_scenarios(
    outcome: Outcome, task: Task, program: LabelledProgram, ended: Concluded, rest: Rest, weights: I64
) -> Outcome:  # fmt: skip
    """Columns about all vectors of weights, int64[R, n] of the whole graph; the first has been answered."""
    assert ended.settled is not None
    cases = [ended.settled]
    for settled in _other_scenarios(task, program, ended, rest, weights):
        if task.stop is Stop.CANCEL:
            break
        cases.append(settled)
    if task.stop is Stop.CANCEL:
        found = Found(Verdict.CANCELLED, None, None, None, ended.found.structure, "cancelled on request")
        return outcome_of(found, 0, 1, lambda chosen: lift(rest, chosen), rest.vertices)
    chosen = [case.chosen for case in cases]
    values = np.array([int(w[rest.vertices][c != 0].sum()) for w, c in zip(weights, chosen, strict=True)], np.int64)
    bounds = np.array([case.bound for case in cases], np.int64)
    proven = int((values == bounds).sum())
    columns: Columns = {
        "scenario_value": values,
        "scenario_bound": bounds,
        "scenario_start": np.cumsum([0, *(int(c.sum()) for c in chosen)], dtype=np.int64),
        "scenario_chosen": np.concatenate([lift(rest, as_vertices(c)) for c in chosen]),
    }
    if program.colours:
        colours = [case.colour[c != 0] for case, c in zip(cases, chosen, strict=True) if case.colour is not None]
        columns["scenario_colour"] = np.concatenate(colours)
    return replace(
        outcome,
        verdict=Verdict.PROVEN if proven == len(cases) else Verdict.BOUNDED,
        proof="search",
        proof_kinds=("search",) * len(outcome.proof_kinds),
        reason=f"{outcome.reason}; proven for {proven} of {len(cases)} scenarios",
        columns={**{name: kept for name, kept in outcome.columns.items() if not name.startswith("proof_")}, **columns},
    )


def _other_scenarios(
    task: Task, program: LabelledProgram, ended: Concluded, rest: Rest, weights: I64
) -> Iterator[Settled]:  # fmt: skip
    """All scenarios but the first: the structure and the order of the bags are shared, the sweeps are not.

    States with labels are few next to what it takes to find them and what hangs from them, and which of them is best
    differs between scenarios; so each has its own sweep.  Where the first was not settled, or time is up, greed and
    bounds answer.
    """
    structure = ended.found.structure
    ranking = None if structure is None else structure.ranking
    again = ended.settled.again if ended.settled is not None else None
    for vector in weights[1:]:
        left = vector[rest.vertices]
        left.flags.writeable = False
        settled = None
        with task.gauge.monitor.aside() as quiet:
            if again is not None and not quiet.stop:
                settled = again(left)
            if settled is None:
                settled = program.quick(replace(task, weights=left, gauge=Gauge(quiet, 0, 1)), ranking)
        yield settled
