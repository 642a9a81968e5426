"""Small conflict graphs for latency and throughput: every one different, ten vertices each."""

import nearchord
import numpy as np

from bench.problem import Problem, windows

VERTICES = 10


def graphs(count: int, seed: int) -> list[nearchord.Graph]:
    """So many graphs of ten windows with one cleared pair, by consecutive seeds."""
    return [as_graph(windows(VERTICES, 4, 1, seed + i)) for i in range(count)]


def as_graph(problem: Problem) -> nearchord.Graph:
    """The problem as the client library holds it."""
    return nearchord.Graph.from_arrays(problem.n, problem.low, problem.high, problem.weights)


def shuffled(problem: Problem, seed: int) -> tuple[np.ndarray, np.ndarray]:
    """Ends of all edges as int64 arrays, in random order and random direction."""
    random = np.random.default_rng(seed)
    order = random.permutation(problem.m)
    turn = random.random(problem.m) < 0.5
    low, high = problem.low[order].astype(np.int64), problem.high[order].astype(np.int64)
    return np.where(turn, high, low), np.where(turn, low, high)
