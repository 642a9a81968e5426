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
        self._graph, self._monitor = graph, monitor
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

    def cover(self, heaviest: Heaviest, weights: I64, most: int) -> list[NDArray[np.bool_]]:
        """``heaviest`` and up to ``most`` further sets, each the heaviest of what those before leave; all made maximal.

        Together they are what a plan is made of, so a linear program gets further with them than with one alone.
        """
        left = weights.copy()
        found: list[NDArray[np.bool_]] = []
        next_one: Heaviest | None = heaviest
        while next_one is not None and next_one.weight:
            found.append(self._maximal(next_one.chosen))
            left[next_one.chosen] = 0
            next_one = self.heaviest(left) if len(found) <= most else None
        return found

    def _maximal(self, chosen: NDArray[np.bool_]) -> NDArray[np.bool_]:
        """The set with further vertices, lower ones first, until none can be added."""
        graph, grown = self._graph, chosen.copy()
        for v in np.flatnonzero(~chosen).tolist():
            grown[v] = not grown[graph.adj[graph.ptr[v] : graph.ptr[v + 1]]].any()
        return grown
