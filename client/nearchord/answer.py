"""An answer and where it comes from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.question import Budget, Question
from nearchord.stages import Phase, ProofKind, Verdict, WhenOver


@dataclass(frozen=True)
class Provenance:
    """Enough to compute an answer again. Times in seconds, memory in bytes; addresses are "" where there is none."""

    graph_address: str
    weights_address: str
    solver_version: str
    proof_format: int
    budget: Budget
    when_over: WhenOver
    attempt: int
    phases: tuple[tuple[Phase, float], ...]
    seconds: float
    wait_seconds: float
    peak_memory_bytes: int
    finished_at: datetime | None


@dataclass(frozen=True)
class Recognition:
    """Classes of a graph; None where it was not settled in time.

    `chordal`: no chordless cycle on four or more vertices. `interval`: overlaps of intervals of a line. `split`: a
    clique and an independent set together; `splittance`: fewest edges to add and remove to make it so.
    """

    chordal: bool | None
    interval: bool | None
    split: bool | None
    splittance: int | None


@dataclass(frozen=True)
class Prediction:
    """What an exact answer to a question would take: states of its dynamic program, and bytes.

    `colours` is 0 where the question takes none. `at_least`: the truth is that many states or more. `fits`: both stay
    within the budget of the job.
    """

    question: str
    colours: int
    states: int
    at_least: bool
    memory_bytes: int
    fits: bool


@dataclass(frozen=True)
class StructureReport:
    """How a graph falls apart: connected components, and vertices of the largest fill core (0 without one)."""

    components: int
    largest_core: int
    predictions: tuple[Prediction, ...]


@dataclass(frozen=True, eq=False)
class Answer:
    """How a job ended.

    `chosen` are vertices from 0, ascending (read-only uint32; empty where nothing was chosen). `value` and `bound` are
    whole numbers unless the question deals in shares; `bound` is an upper bound when maximising and a lower bound when
    minimising. Figures that were never known are None. `seconds` is worker time, `vertices` the size of the graph.
    `columns`: what else the answer has, by the names that the contract gives (nearchord/v1/answer.proto, ColumnInfo),
    read-only uint32 or int64. `recognition` comes with the question `fill`, `structure` with `structure`.
    """

    job_id: str
    batch_index: int
    label: str
    question: Question
    verdict: Verdict
    value: int | Fraction | None
    bound: int | Fraction | None
    chosen: NDArray[np.uint32]
    reason: str
    fill: int | None
    fill_lower_bound: int | None
    states: int | None
    bags: int | None
    largest_bag: int | None
    parts: int | None
    fill_cores: int | None
    proof: ProofKind
    proof_kinds: tuple[ProofKind, ...]
    seconds: float
    vertices: int
    names_address: str
    provenance: Provenance
    columns: Mapping[str, NDArray[Any]] = field(default_factory=dict)
    recognition: Recognition | None = None
    structure: StructureReport | None = None

    @property
    def colour(self) -> NDArray[np.uint32]:
        """The colours of `chosen`, from 1, aligned with it; empty unless the question gives colours."""
        found: NDArray[np.uint32] = self.columns.get("colour", np.zeros(0, np.uint32))
        return found

    @property
    def proof_bytes(self) -> int:
        """Bytes that the certificate of the bound takes, 0 where there is none: of all columns named `proof_`."""
        return sum(column.nbytes for name, column in self.columns.items() if name.startswith("proof_"))

    @property
    def fill_edges(self) -> NDArray[np.uint32]:
        """The pairs to add as uint32[k, 2], smaller end first, ascending; k = 0 unless the question is `fill`."""
        ends: NDArray[np.uint32] = self.columns.get("fill_edge", np.zeros(0, np.uint32))
        return ends.reshape(-1, 2)
