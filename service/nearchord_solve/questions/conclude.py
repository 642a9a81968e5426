"""From what was found to the outcome of a question."""

from collections.abc import Callable

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.monitor import Monitor, Stop
from nearchord_solve.outcome import Outcome, Verdict
from nearchord_solve.questions.heaviest import Found
from nearchord_solve.questions.pins import Contradiction
from nearchord_solve.sweep.independent import as_vertices


def contradiction(pins: Contradiction, inside: str, outside: str, kind: str = "adjacent vertices") -> Outcome:
    """INFEASIBLE, naming the vertex or the pair, which is of a ``kind``; vertices are 0-based."""
    if pins.one == pins.other:
        return infeasible(f"the pins contradict each other: vertex {pins.one} {inside} and {outside}")
    return infeasible(f"the pins contradict each other: {kind} {pins.one} and {pins.other} both {inside}")


def infeasible(reason: str) -> Outcome:
    """INFEASIBLE, and why."""
    nothing = np.empty(0, np.uint32)
    return Outcome(Verdict.INFEASIBLE, None, None, nothing, None, 0, None, 0, 0, 0, 0, "none", (), reason)


def without_structure(monitor: Monitor, reason: str) -> Outcome:
    """The end of a question about the fill that came to nothing: cancelled, or bounded by nought from below."""
    cancelled = monitor.stop is Stop.CANCEL
    return Outcome(
        verdict=Verdict.CANCELLED if cancelled else Verdict.BOUNDED,
        value=None,
        bound=None if cancelled else 0,
        chosen=None,
        fill=None,
        fill_lower_bound=0,
        states=None,
        bags=0,
        largest_bag=0,
        parts=0,
        fill_cores=0,
        proof="none",
        proof_kinds=(),
        reason="cancelled on request" if cancelled else reason,
    )


def outcome_of(found: Found, offset: int, sign: int, lift: Callable[[U32], U32], vertices: I64) -> Outcome:
    """Outcome in the question's terms: its value is ``offset + sign * value``, its choice ``lift`` of ours.

    ``vertices`` int64: the number that each of our vertices has in the graph of the question.
    """
    structure = found.structure
    proven = found.verdict is Verdict.PROVEN
    cores = structure.fill_cores if structure else 0
    proof = found.proof if found.bound is not None and found.proof and found.proof.bound <= found.bound else None
    searched = proven or (found.proof is not None and found.bound is not None)
    kind = "certificate" if proof else "search" if searched else "none"
    return Outcome(
        verdict=found.verdict,
        value=None if found.value is None else offset + sign * found.value,
        bound=None if found.bound is None else offset + sign * found.bound,
        chosen=np.empty(0, np.uint32) if found.chosen is None else lift(as_vertices(found.chosen)),
        fill=structure.fill if structure else None,
        fill_lower_bound=structure.fill_lower_bound if structure else 0,
        states=structure.states if structure else None,
        bags=structure.bags if structure else 0,
        largest_bag=structure.largest_bag if structure else 0,
        parts=structure.parts if structure else 0,
        fill_cores=cores,
        proof=kind,
        proof_kinds=(kind,) * cores,
        reason=found.reason,
        columns=proof.columns(vertices) if proof else {},
    )
