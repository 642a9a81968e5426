"""An answer and where it comes from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime
from fractions import Fraction
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord.budget import Budget
from nearchord.question import Question
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
class Scenario:
    """What one weight vector came to; `chosen` and `colour` as in an answer."""

    value: int
    bound: int
    chosen: NDArray[np.uint32]
    colour: NDArray[np.uint32]


@dataclass(frozen=True, eq=False)
class Answer:
    """How a job ended.

    `chosen` are vertices from 0, ascending (read-only uint32; empty where nothing was chosen). `value` and `bound` are
    whole numbers unless the question deals in shares; `bound` is an upper bound when maximising and a lower bound when
    minimising. Figures that were never known are None. `seconds` is worker time, `vertices` the size of the graph.
    `columns`: what else the answer has, by the names that the contract gives (nearchord/v1/answer.proto, ColumnInfo),
    read-only uint32 or int64. `recognition` comes with the question `fill`, `structure` with `structure`, `count` with
    the add-on `count`: how many different sets are as heavy as the best.
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
    count: int | None = None

    @property
    def colour(self) -> NDArray[np.uint32]:
        """The colours, from 1, of `chosen`, aligned with it; of `colouring` those of all vertices, which `colours_of`
        takes apart. Empty unless the question gives colours."""
        return self._vertices("colour")

    def colours_of(self, vertex: int) -> tuple[int, ...]:
        """The colours of one vertex, ascending; none for a vertex without."""
        if "colour_start" in self.columns:
            begin, end = self.columns["colour_start"][vertex : vertex + 2].tolist()
            return tuple(self.colour[begin:end].tolist())
        if self.question.name == "colouring":
            return tuple(self.colour[vertex : vertex + 1].tolist())
        return tuple(self.colour[self.chosen == vertex].tolist()) if self.colour.size else ()

    @property
    def proof_bytes(self) -> int:
        """Bytes that the certificate of the bound takes, 0 where there is none: of all columns named `proof_`."""
        return sum(column.nbytes for name, column in self.columns.items() if name.startswith("proof_"))

    @property
    def fill_edges(self) -> NDArray[np.uint32]:
        """The pairs to add as uint32[k, 2], smaller end first, ascending; k = 0 unless the question is `fill`."""
        return self._vertices("fill_edge").reshape(-1, 2)

    @property
    def price_in(self) -> NDArray[np.int64]:
        """By vertex: how much worse the best answer with it is than the best; -1 where there is none. Empty unless
        `prices` were asked for and the verdict is PROVEN."""
        return self._numbers("price_in")

    @property
    def price_out(self) -> NDArray[np.int64]:
        """By vertex: how much worse the best answer without it is than the best; see `price_in`."""
        return self._numbers("price_out")

    @property
    def conflict_price(self) -> NDArray[np.int64]:
        """By edge, in the order of `Graph.edges`: how much better the best answer were if both ends could be in it.
        Empty unless `conflict_prices` were asked for and the verdict is PROVEN."""
        return self._numbers("conflict_price")

    @property
    def best(self) -> list[tuple[int, NDArray[np.uint32]]]:
        """The best different sets with their values, best first; none unless `best` of 2 or more was asked for."""
        return list(zip(self._numbers("best_value").tolist(), self._cut("best_start", "best_chosen"), strict=False))

    @property
    def scenarios(self) -> list[Scenario]:
        """What each of the scenarios came to, in their order; none where there were none."""
        chosen = self._cut("scenario_start", "scenario_chosen")
        colour = self._cut("scenario_start", "scenario_colour")
        figures = (self._numbers(f"scenario_{name}").tolist() for name in ("value", "bound"))
        return [Scenario(*of) for of in zip(*figures, chosen, colour, strict=False)]

    @property
    def shares(self) -> list[tuple[Fraction, NDArray[np.uint32]]]:
        """The sets that take turns, with the part of the frame that each is on for (`fractional-colouring`)."""
        parts = self._fractions("share")
        return list(zip(parts, self._cut("share_start", "share_vertex"), strict=False))

    @property
    def bottleneck(self) -> list[Fraction]:
        """Prices of the vertices under which no conflict-free set is worth more than 1, and all demands the bound;
        empty where no such prices were found."""
        return self._fractions("bottleneck")

    def _numbers(self, name: str) -> NDArray[np.int64]:
        found: NDArray[np.int64] = self.columns.get(name, np.zeros(0, np.int64))
        return found

    def _vertices(self, name: str) -> NDArray[np.uint32]:
        found: NDArray[np.uint32] = self.columns.get(name, np.zeros(0, np.uint32))
        return found

    def _cut(self, start: str, name: str) -> list[NDArray[np.uint32]]:
        column = self._vertices(name)
        return [column[begin:end] for begin, end in pairwise(self._numbers(start).tolist())]

    def _fractions(self, name: str) -> list[Fraction]:
        below = self._numbers(f"{name}_denominator").tolist()
        return [Fraction(above, below[0]) for above in self._numbers(f"{name}_numerator").tolist()] if below else []
