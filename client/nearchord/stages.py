"""The closed sets of words in which a job's life is told."""

from __future__ import annotations

from enum import StrEnum


class Stage(StrEnum):
    """Where a job stands; jobs move WAITING -> SOLVING -> DONE, and back to WAITING when their worker is lost."""

    WAITING = "WAITING"
    SOLVING = "SOLVING"
    DONE = "DONE"


class Verdict(StrEnum):
    """How a DONE job ended."""

    PROVEN = "PROVEN"
    """Value and bound meet."""
    BOUNDED = "BOUNDED"
    """A budget ran out: a feasible answer with a valid bound on the optimum."""
    OVER_FILL = "OVER_FILL"
    """The fill budget is provably too small, and the job asked to stop there (the question `fill` always stops)."""
    INFEASIBLE = "INFEASIBLE"
    """The pins contradict each other."""
    CANCELLED = "CANCELLED"
    """Withdrawn by the client."""
    EXPIRED = "EXPIRED"
    """Not started before its `not_after` time."""
    BROKEN = "BROKEN"
    """Its workers were lost or killed too often; the reason says how."""

    @property
    def answered(self) -> bool:
        """Whether there is a value: PROVEN or BOUNDED."""
        return self in (Verdict.PROVEN, Verdict.BOUNDED)


class Phase(StrEnum):
    """What a solve is doing."""

    READ = "READ"
    ORDER = "ORDER"
    FILL = "FILL"
    TREE = "TREE"
    SWEEP = "SWEEP"
    IMPROVE = "IMPROVE"


class ProofKind(StrEnum):
    """How a bound is known."""

    CERTIFICATE = "certificate"
    """A checker confirms it from the graph and the proof, without trusting the solver."""
    SEARCH = "search"
    """The solver searched exhaustively; confirming it means computing it again."""
    PACKING = "packing"
    """Of a fill core: chordless cycles, each of which needs chords, with shares under which no pair counts twice."""
    BRANCH = "branch"
    """Of a fill core: a tree of cases, a pair filled or never filled, with a packing at every leaf."""
    NONE = "none"
    """No bound was reached, or the verdict needs none."""


class WhenOver(StrEnum):
    """What a job does when its fill or state budget does not suffice."""

    BOUND = "bound"
    """Return the best answer and bound that the seconds allow."""
    STOP = "stop"
    """End at once and say which budget was too small."""
