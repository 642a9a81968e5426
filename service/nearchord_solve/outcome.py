"""How a solve ended."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum
from fractions import Fraction

from nearchord_solve.arrays import I64, U32
from nearchord_solve.kept import Kept


class Verdict(Enum):
    """The verdicts that a solver can give; the service adds those about time and workers."""

    PROVEN = "PROVEN"
    BOUNDED = "BOUNDED"
    OVER_FILL = "OVER_FILL"
    INFEASIBLE = "INFEASIBLE"
    CANCELLED = "CANCELLED"


@dataclass(frozen=True)
class Recognition:
    """Which well-known classes the graph belongs to; None where that was not settled."""

    chordal: bool | None
    interval: bool | None
    split: bool | None
    splittance: int | None


@dataclass(frozen=True)
class Prediction:
    """What an exact answer would take.

    ``colours``: 0 where the question takes none.  ``states``: states that count against a state budget, at least so
    many if ``at_least``.  ``memory_bytes``: what the solve would hold.  ``fits``: both are within the budget.
    """

    question: str
    colours: int
    states: int
    at_least: bool
    memory_bytes: int
    fits: bool


@dataclass(frozen=True)
class StructureReport:
    """How a graph falls apart: connected components, vertices of the largest fill core (0 without one), and what each
    question would cost."""

    components: int
    largest_core: int
    predictions: tuple[Prediction, ...]


@dataclass(frozen=True, eq=False)
class Outcome:
    """The answer of a solve and what it took.

    ``value``, ``bound``: int, or Fraction where a question deals in shares, or None where there is none; ``bound`` is
    an upper bound when maximising, a lower bound when minimising; both of the first scenario where there are several.
    ``count``: how many choices are as good as the best, of any size, None if not asked or not known.  ``chosen``
    uint32, ascending, None for questions that choose no vertices.
    ``fill``: fill edges used, None if no triangulation was finished; ``fill_lower_bound``: no triangulation has fewer.
    ``states``: states in bags that hold fill (bags without fill need no table), None if not counted.  ``parts``: what
    remains when the tree of bags is cut at adhesions without fill; ``fill_cores``: parts that hold fill.  ``proof``:
    "search" if the bound can be recomputed only, "certificate" if a checker can confirm it, "none" if nothing is
    proven; ``proof_kinds``: one per fill core.  ``reason``: in words, never empty.  ``columns``: further arrays by
    name, uint32 (vertices or colours) or int64.  ``kept``: the structure of the graph, if it is new, for later solves
    on the same graph.
    """

    verdict: Verdict
    value: int | Fraction | None
    bound: int | Fraction | None
    chosen: U32 | None
    fill: int | None
    fill_lower_bound: int
    states: int | None
    bags: int
    largest_bag: int
    parts: int
    fill_cores: int
    proof: str
    proof_kinds: tuple[str, ...]
    reason: str
    columns: Mapping[str, U32 | I64] = field(default_factory=dict)
    recognition: Recognition | None = None
    report: StructureReport | None = None
    kept: Kept | None = None
    count: int | None = None
