"""Why no plan is shorter than a bound."""

from dataclasses import dataclass
from fractions import Fraction
from math import ceil

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.colouring.shortest import Bottleneck
from nearchord_solve.proof import Certificate

Columns = dict[str, U32 | I64]


@dataclass(frozen=True, eq=False)
class Evidence:
    """``bound``: no plan is shorter.

    Of the three reasons one is there: a ``clique`` (int64, ascending), whose vertices need disjoint times; a
    ``bottleneck`` on ``vertices`` (int64, ascending), multipliers that no independent set is worth more than their
    denominator of; or neither, after a search that tried everything shorter.
    """

    bound: Fraction
    clique: I64 | None = None
    vertices: I64 | None = None
    bottleneck: Bottleneck | None = None

    @property
    def certified(self) -> bool:
        """Whether a checker can confirm the bound."""
        return self.clique is not None or self.bottleneck is not None

    def columns(self, n: int, whole: bool) -> Columns:
        """What a checker needs, for a graph of ``n`` vertices; ``whole``: for plans in whole units.

        Then a clique stands for itself.  Otherwise it is written as multipliers of 1 on its vertices.
        """
        if self.clique is not None and whole:
            return {"proof_clique": self.clique.astype(np.uint32)}
        if self.clique is not None:
            return _multipliers(n, self.clique, np.ones(self.clique.size, np.int64), 1, _one_clique(self.clique))
        if self.bottleneck is None or self.vertices is None:
            return {}
        found = self.bottleneck
        return _multipliers(
            n, self.vertices, found.numerator, found.denominator, found.certify().columns(self.vertices)
        )


def _multipliers(n: int, vertices: I64, numerator: I64, denominator: int, proof: Columns) -> Columns:
    every = np.zeros(n, np.int64)
    every[vertices] = numerator
    return {"bottleneck_numerator": every, "bottleneck_denominator": np.array([denominator], np.int64), **proof}


def _one_clique(clique: I64) -> Columns:
    """The certificate that an independent set has at most one vertex of a clique."""
    none = np.empty(0, np.int64)
    count = min(1, clique.size)
    number = np.arange(clique.size, dtype=np.uint32)
    start = np.array([0, clique.size] if count else [0], np.int64)
    one = Certificate(
        count, start, number, np.ones(count, np.int64), np.zeros(1, np.int64), np.empty(0, np.uint32), none, none, none
    )
    return one.columns(clique)


def rounded(bound: Fraction, whole: bool) -> Fraction:
    """The bound of plans in ``whole`` units that follows from one for all plans."""
    return Fraction(ceil(bound)) if whole else bound
