"""Question ``fill``: the fewest edges whose addition makes the graph chordal.

The planner's reading: how far the conflict data is from well-behaved, and which pairs break it.
"""

from dataclasses import dataclass, replace

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.budget import Budget
from nearchord_solve.fill.exact import GraphFill, PartFill, ProofKind, fill_of_graph
from nearchord_solve.fill.exact.witness import proof_columns
from nearchord_solve.graph import Graph
from nearchord_solve.kept import Reuse
from nearchord_solve.memory import predicted_bytes
from nearchord_solve.monitor import Monitor, Stop
from nearchord_solve.order import Unfinished, eliminate, rank_along
from nearchord_solve.outcome import Outcome, Recognition, Verdict
from nearchord_solve.questions.classes import Columns, recognise
from nearchord_solve.questions.conclude import without_structure
from nearchord_solve.structure import Structure
from nearchord_solve.tree import Partial, build_structure, with_fill
from nearchord_solve.wording import counted, fill_needed, verb


@dataclass(frozen=True)
class Fill:
    """Takes neither weights nor pins."""

    def answer(
        self, graph: Graph, weights: I64, budget: Budget, when_over: str, monitor: Monitor, reuse: Reuse
    ) -> Outcome:
        """Answer for checked arguments; see :func:`nearchord_solve.solve`.

        The fill budget is the limit of the proof: a lower bound above it ends the search as OVER_FILL.
        """
        need = predicted_bytes(graph.n, graph.m)
        if need > budget.memory:
            return without_structure(monitor, f"memory budget: {need} bytes are needed")
        structure = build_structure(graph, replace(budget, fill=None), monitor, reuse)
        if isinstance(structure, Partial):
            return without_structure(monitor, structure.reason)
        recognition, columns = recognise(graph, structure, monitor)
        found = fill_of_graph(graph, structure, budget.fill, monitor, budget.memory)
        if monitor.stop is Stop.CANCEL:
            return without_structure(monitor, "")
        return _conclude(graph, structure, found, recognition, columns, budget, monitor)


@dataclass(frozen=True)
class _Core:
    """A fill core in the answer."""

    vertices: I32
    kind: str


def _conclude(
    graph: Graph, structure: Structure, found: GraphFill, recognition: Recognition, classes: Columns,
    budget: Budget, monitor: Monitor,
) -> Outcome:  # fmt: skip
    unstopped = Monitor()  # the end is not cut short by a stop that was heeded already
    final = with_fill(structure, found.edges, found.lower_bound, budget, unstopped)
    assert isinstance(final, Structure)
    order = confirmed_order(graph, final, found.edges)
    cores = [core for part in found.parts for core in _cores(part)]
    proven = found.lower_bound == found.upper_bound
    monitor.incumbent(found.upper_bound)
    monitor.bound(found.lower_bound)
    witness, complete = proof_columns(found.parts)
    columns: Columns = {
        "fill_edge": found.edges.ravel().astype(np.uint32),
        "elimination_order": order.astype(np.uint32),
        **classes,
        **witness,
        **core_columns([core.vertices for core in cores]),
    }
    return Outcome(
        verdict=Verdict.OVER_FILL if found.over else Verdict.PROVEN if proven else Verdict.BOUNDED,
        value=found.upper_bound,
        bound=found.lower_bound,
        chosen=None,
        fill=found.upper_bound,
        fill_lower_bound=found.lower_bound,
        states=final.states,
        bags=final.bags,
        largest_bag=final.largest_bag,
        parts=final.parts,
        fill_cores=len(cores),
        proof=_proof(cores, complete) if proven else "none",
        proof_kinds=tuple(core.kind for core in cores),
        reason=_reason(found, budget, monitor),
        columns=columns,
        recognition=recognition,
    )


def confirmed_order(graph: Graph, structure: Structure, edges: I32) -> I32:
    """A perfect elimination order of the graph with ``edges`` added; raises AssertionError if it is none.

    Eliminating along it must need these edges and no others.
    """
    order = structure.elimination_order()
    numbering = eliminate(rank_along(graph, np.ascontiguousarray(order[::-1])), edges.shape[0], Monitor())
    if isinstance(numbering, Unfinished):
        raise AssertionError("the fill found does not make the graph chordal")
    upper = np.repeat(np.arange(graph.n)[::-1], np.diff(numbering.fill_end[::-1]))
    ends = np.sort(np.stack((numbering.order[upper], numbering.order[numbering.fill]), 1), axis=1)
    if not np.array_equal(ends[np.lexsort((ends[:, 1], ends[:, 0]))], edges):
        raise AssertionError("the fill found is not that of its elimination order")
    return order


def core_columns(cores: list[I32]) -> Columns:
    """The vertices of each core."""
    return {
        "core_start": np.cumsum([0, *(core.size for core in cores)], dtype=np.int64),
        "core_vertex": np.concatenate([np.empty(0, np.uint32), *(core.astype(np.uint32) for core in cores)]),
    }


def _cores(part: PartFill) -> list[_Core]:
    """The atoms of a part that was searched, the whole part otherwise; each with how its bound is known."""
    if part.result is None:
        return [_Core(part.vertices, str(ProofKind.NONE))]
    found = []
    for piece in part.result.pieces:
        vertices = part.vertices[piece.vertices]
        fill = int(np.isin(part.edges, vertices).all(axis=1).sum())
        found.append(_Core(vertices, str(piece.kind if piece.bound == fill else ProofKind.NONE)))
    return found


def _proof(cores: list[_Core], complete: bool) -> str:
    """A certificate only if the columns prove the bound of every core."""
    witnessed = (ProofKind.PACKING, ProofKind.BRANCH)
    return "certificate" if complete and all(core.kind in witnessed for core in cores) else "search"


def _reason(found: GraphFill, budget: Budget, monitor: Monitor) -> str:
    lower, upper = found.lower_bound, found.upper_bound
    if found.over:
        return f"{fill_needed(lower, budget.fill or 0)}; {upper:,} {verb(upper, 'suffices', 'suffice')}"
    if lower == upper == 0:
        return "the graph is chordal"
    enough = f"{counted(upper, 'fill edge')} {verb(upper, 'suffices', 'suffice')}"
    if lower == upper:
        return f"{enough} and no fewer do"
    ended = "seconds ran out" if monitor.stop else "some fill cores are too large to be searched"
    return f"{ended}: {enough} and at least {lower:,} {verb(lower, 'is', 'are')} needed"
