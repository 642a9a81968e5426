"""Question ``structure``: how the graph falls apart, and what each question would cost.

The planner's reading: is an exact answer affordable, before paying.
"""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Monitor, Stop
from nearchord_solve.outcome import Outcome, Prediction, StructureReport, Verdict
from nearchord_solve.predict import predict
from nearchord_solve.questions.conclude import without_structure
from nearchord_solve.structure import Structure as Built
from nearchord_solve.tree import Partial, build_structure
from nearchord_solve.wording import counted, verb


@dataclass(frozen=True)
class Structure:
    """Takes neither weights nor pins."""

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`."""
        need = predicted_bytes(graph.n, graph.m)
        if need > budget.memory:
            return without_structure(monitor, f"memory budget: {need} bytes are needed")
        structure = build_structure(graph, budget, monitor, reuse)
        if isinstance(structure, Partial):
            return without_structure(monitor, structure.reason)
        predictions = predict(structure, budget, monitor)
        if monitor.stop is Stop.CANCEL:
            return without_structure(monitor, "")
        return _conclude(structure, predictions, monitor)


def _conclude(structure: Built, predictions: tuple[Prediction, ...], monitor: Monitor) -> Outcome:
    lower, upper = structure.fill_lower_bound, structure.fill
    monitor.incumbent(upper)
    monitor.bound(lower)
    proven = lower == upper
    ptr, vertices = structure.core_vertices()
    if upper == 0:
        reason = "the graph is chordal"
    else:
        least = "no fewer do" if proven else f"at least {lower:,} {verb(lower, 'is', 'are')} needed"
        reason = (
            f"{counted(upper, 'fill edge')} in {counted(structure.fill_cores, 'fill core')}"
            f" {verb(upper, 'suffices', 'suffice')} and {least}"
        )
    return Outcome(
        verdict=Verdict.PROVEN if proven else Verdict.BOUNDED,
        value=upper,
        bound=lower,
        chosen=None,
        fill=upper,
        fill_lower_bound=lower,
        states=structure.states,
        bags=structure.bags,
        largest_bag=structure.largest_bag,
        parts=structure.parts,
        fill_cores=structure.fill_cores,
        proof="search" if proven else "none",
        proof_kinds=("search" if proven else "none",) * structure.fill_cores,
        reason=reason,
        columns={"core_start": ptr, "core_vertex": vertices.astype(np.uint32)},
        report=StructureReport(
            int((structure.numbering.parent < 0).sum()), int(np.diff(ptr).max(initial=0)), predictions
        ),
    )
