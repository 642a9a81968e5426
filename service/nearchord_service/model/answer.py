"""Answers as recorded: figures, provenance, and columns of little-endian bytes."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum

from nearchord_service.model.event import Phase
from nearchord_service.model.stage import Verdict


class ProofKind(StrEnum):
    """How a bound is known."""

    CERTIFICATE = "certificate"
    SEARCH = "search"
    PACKING = "packing"
    BRANCH = "branch"
    NONE = "none"


class ElementType(StrEnum):
    """How the elements of a column are written (little-endian)."""

    UINT32 = "uint32"
    INT64 = "int64"

    @property
    def size_bytes(self) -> int:
        """Bytes of one element."""
        return 4 if self is ElementType.UINT32 else 8


@dataclass(frozen=True)
class Column:
    """A named column of an answer; what each holds is said in the contract, at `ColumnInfo`."""

    name: str
    type: ElementType
    data: bytes


@dataclass(frozen=True)
class Recognition:
    """Classes of a graph; None where it was not settled."""

    chordal: bool | None = None
    interval: bool | None = None
    split: bool | None = None
    splittance: int | None = None


@dataclass(frozen=True)
class Prediction:
    """What an exact answer would take; `colours` is 0 where the question takes none."""

    question: str
    colours: int
    states: int
    at_least: bool
    memory_bytes: int
    fits: bool


@dataclass(frozen=True)
class StructureReport:
    """How a graph falls apart."""

    components: int
    largest_core: int
    predictions: tuple[Prediction, ...]


@dataclass(frozen=True)
class Answer:
    """What a job came to.

    `value` and `bound` are exact (numerator, denominator) pairs, None where there is none; `reason` is never empty;
    counts that were not reached are None. `count` is the number of optima in decimal digits: it may be too long for
    the whole numbers that Python reads, and no process but the worker's spends time on converting it.
    """

    verdict: Verdict
    reason: str
    value: tuple[int, int] | None = None
    bound: tuple[int, int] | None = None
    fill: int | None = None
    fill_lower_bound: int | None = None
    states: int | None = None
    bags: int | None = None
    largest_bag: int | None = None
    parts: int | None = None
    fill_cores: int | None = None
    proof: ProofKind = ProofKind.NONE
    proof_kinds: tuple[ProofKind, ...] = ()
    solver_version: str = ""
    proof_format: int = 0
    phase_seconds: tuple[tuple[Phase, float], ...] = ()
    seconds: float = 0.0
    peak_memory_bytes: int = 0
    columns: tuple[Column, ...] = field(default=())
    count: str | None = None
    recognition: Recognition | None = None
    structure: StructureReport | None = None
