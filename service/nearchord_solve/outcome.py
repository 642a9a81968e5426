"""How a solve ended."""

from dataclasses import dataclass
from enum import Enum

from nearchord_solve.arrays import U32


class Verdict(Enum):
    """The verdicts that a solver can give; the service adds those about time and workers."""

    PROVEN = "PROVEN"
    BOUNDED = "BOUNDED"
    OVER_FILL = "OVER_FILL"
    INFEASIBLE = "INFEASIBLE"
    CANCELLED = "CANCELLED"


@dataclass(frozen=True, eq=False)
class Outcome:
    """The answer of a solve and what it took.

    ``value``, ``bound``: int or None where there is none; ``bound`` is an upper bound when maximising, a lower
    bound when minimising.  ``chosen`` uint32, ascending.  ``fill``: fill edges used, None if no triangulation
    was finished; ``fill_lower_bound``: no triangulation has fewer.  ``states``: states in bags that hold fill
    (bags without fill need no table), None if not counted.  ``parts``: what remains when the tree of bags is
    cut at adhesions without fill; ``fill_cores``: parts that hold fill.  ``proof``: "search" if the bound can
    be recomputed only, "certificate" if a checker can confirm it, "none" if nothing is proven;
    ``proof_kinds``: one per fill core.  ``reason``: in words, never empty.
    """

    verdict: Verdict
    value: int | None
    bound: int | None
    chosen: U32
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
