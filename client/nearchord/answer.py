"""An answer and where it comes from."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from fractions import Fraction

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


@dataclass(frozen=True, eq=False)
class Answer:
    """How a job ended.

    `chosen` are vertices from 0, ascending (read-only uint32; empty where nothing was chosen). `value` and `bound` are
    whole numbers unless the question deals in shares; `bound` is an upper bound when maximising and a lower bound when
    minimising. Figures that were never known are None. `seconds` is worker time, `vertices` the size of the graph.
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
