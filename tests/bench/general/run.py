"""What a run of a general solver found."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from bench.clock import Spent


@dataclass(frozen=True)
class Run:
    """One run: ``value`` of the best choice found and ``bound`` on the optimum, None if there is none.

    ``chosen``: columns of the choice.
    """

    status: str
    value: int | None
    bound: float | None
    build_seconds: float
    spent: Spent
    chosen: frozenset[int] = frozenset()

    @property
    def seconds(self) -> float:
        """Seconds by the wall, without building the model."""
        return self.spent.seconds

    @property
    def proven(self) -> bool:
        """Whether the solver says that its value is optimal."""
        return self.status == "optimal"


def columns_of(values: NDArray[np.float64]) -> frozenset[int]:
    """Columns that a 0-1 solution takes."""
    return frozenset(np.flatnonzero(values > 0.5).tolist())
