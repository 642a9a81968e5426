"""Feasible sets and bounds for whatever the tables cannot settle."""

from collections.abc import Callable

import numpy as np

from nearchord_solve.arrays import I32, I64, U8
from nearchord_solve.graph import Graph
from nearchord_solve.kernels import cover, local_search, quick
from nearchord_solve.monitor import Monitor, Phase
from nearchord_solve.order import Ranking
from nearchord_solve.proof import Certificate, certify_cover, room_for_cover

ROUNDS = 4096  # kicks between two looks at the result
KICKS_PER_VERTEX = 1000
MOST_KICKS = 1 << 20
PATIENCE = 64  # turns of ROUNDS kicks without gain before the search ends
SEED = 0x9E3779B97F4A7C15


def quick_pair(graph: Graph, weights: I64) -> tuple[U8, int]:
    """An independent set (uint8[n]) and an upper bound, in about linear time and without looking at the clock.

    Greedy by weight over (degree + 1), ties to the lower vertex; the bound splits weights over edges.
    """
    score = weights / (np.diff(graph.ptr) + 1.0)
    sequence = np.argsort(-score, kind="stable")
    chosen = np.empty(graph.n, np.uint8)
    quick.choose_in_order(graph.ptr, graph.adj, sequence, weights, chosen)
    return chosen, int(quick.split_over_edges(graph.ptr, graph.adj, weights.copy()))


def cover_pair(ranking: Ranking, weights: I64) -> tuple[U8, Certificate]:
    """An independent set (uint8[n]) and an upper bound with its proof, a weighted clique cover along a numbering.

    Time O(sum over the cliques' members of their degrees), without looking at the clock.
    """
    n = weights.size
    homes = np.arange(n, dtype=np.int32)
    residual = weights[ranking.order]
    cliques = room_for_cover(n, ranking.low.size)
    bound = cover.cover_core(homes, ranking.low_ptr, ranking.low, residual, np.zeros(n, np.int32), cliques)
    by_place = np.zeros(n, np.uint8)
    blocked = np.zeros(n, np.uint8)
    by_weight = weights[ranking.order]
    cover.choose_greedily(homes, ranking.low_ptr, ranking.low, by_weight, by_place, blocked)
    chosen = np.empty(n, np.uint8)
    chosen[ranking.order] = by_place
    return chosen, certify_cover(int(bound), ranking.order, cliques)


def improve(
    graph: Graph, weights: I64, chosen: U8, candidates: I32, bound: int,
    gained: Callable[[int], None], monitor: Monitor,
) -> U8:  # fmt: skip
    """Improve ``chosen`` by local search among ``candidates`` until it meets ``bound`` or time or hope is up.

    ``gained`` hears of each better value.  Deterministic, as the number of rounds is fixed, unless stopped.
    """
    n = graph.n
    turns = max(1, min(MOST_KICKS, KICKS_PER_VERTEX * candidates.size) // ROUNDS)
    monitor.enter(Phase.IMPROVE, turns)
    search = local_search.Search(
        graph.ptr, graph.adj, weights, chosen.copy(), chosen.copy(),
        np.zeros(n, np.int64), np.zeros(n, np.int32), np.full(n, -1, np.int64),
        np.empty(4 * n + 64, np.int32), np.zeros(3, np.int64), np.array([SEED], np.uint64),
    )  # fmt: skip
    value = local_search.begin_search(search, candidates)
    gained(int(value))
    idle = 0
    for turn in range(turns):
        if value >= bound or idle >= PATIENCE or monitor.stop:
            break
        monitor.cells[Monitor.STEP] = turn
        better = local_search.kick_and_climb(search, candidates, ROUNDS, monitor.cells)
        idle = idle + 1 if better == value else 0
        value = better
        gained(int(value))
    return search.best
