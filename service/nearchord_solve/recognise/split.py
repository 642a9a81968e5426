"""Split graphs: a clique and an independent set, any edges between them."""

from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32
from nearchord_solve.graph import Graph


@dataclass(frozen=True, eq=False)
class Split:
    """``splittance``: fewest edges to add or remove in all to get a split graph.

    ``clique`` and ``independent`` int32, ascending, are a partition of a split graph; None if it is none.
    """

    splittance: int
    clique: I32 | None
    independent: I32 | None

    @property
    def split(self) -> bool:
        """Whether the graph is split."""
        return self.splittance == 0


def recognise_split(graph: Graph) -> Split:
    """Splittance and partition from the degrees alone.

    With degrees d_1 >= d_2 >= ... and p the largest i with d_i >= i - 1, the splittance is half of
    p(p - 1) + sum of d_i for i > p - sum of d_i for i <= p; if it is 0, the first p vertices are a clique and the
    others are independent (Hammer and Simeone, Combinatorica 1 (1981) 275-284).  O(n log n) time.

    A path on four vertices is split: its middle is the clique.

    >>> recognise_split(Graph.from_edges(4, [(0, 1), (1, 2), (2, 3)])).clique
    array([1, 2], dtype=int32)
    """
    degree = np.diff(graph.ptr)
    order = np.argsort(-degree, kind="stable")
    falling = degree[order]
    p = int(np.count_nonzero(falling >= np.arange(graph.n)))
    splittance = (p * (p - 1) + int(falling[p:].sum()) - int(falling[:p].sum())) // 2
    if splittance:
        return Split(splittance, None, None)
    return Split(0, np.sort(order[:p]).astype(np.int32), np.sort(order[p:]).astype(np.int32))
