"""Heaviest independent sets of one small graph under many weightings."""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from nearchord_solve.arrays import I64
from nearchord_solve.budget import Budget
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.proof import Certificate
from nearchord_solve.structure import Structure
from nearchord_solve.sweep import sweep
from nearchord_solve.tree import build_structure


@dataclass(frozen=True, eq=False)
class Heaviest:
    """``chosen`` bool[p]: an independent set; its ``weight`` is the greatest of all; ``certify`` proves it, once."""

    chosen: NDArray[np.bool_]
    weight: int
    certify: Callable[[], Certificate]


class HeaviestSets:
    """Sweeps over the tree of bags of one graph, whose structure is found once."""

    def __init__(self, graph: Graph, budget: Budget, monitor: Monitor) -> None:
        self._monitor = monitor
        self._budget = replace(budget, fill=None)
        with monitor.aside() as quiet:
            built = build_structure(graph, self._budget, quiet)
        self._structure = built if isinstance(built, Structure) and built.fitting(self._budget).all() else None

    @property
    def affordable(self) -> bool:
        """Whether the states fit the budget."""
        return self._structure is not None

    def heaviest(self, weights: I64) -> Heaviest | None:
        """For ``weights`` int64[p] >= 0 with a sum below 2**62; None if not affordable, or stopped."""
        if self._structure is None:
            return None
        plain = weights.copy()
        plain.flags.writeable = False  # as all weights are: kernels are compiled for one kind of array
        with self._monitor.aside() as quiet:
            swept = sweep(self._structure, plain, self._structure.fitting(self._budget), quiet)
        if swept is None or swept.chosen is None:
            return None
        return Heaviest(swept.chosen != 0, swept.bound, swept.certify)
