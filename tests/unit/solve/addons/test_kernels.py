"""Kernels of the add-ons are compiled by the warm-up, and never again."""

import re
from pathlib import Path

import numpy as np
from nearchord_solve import Budget, Graph, IndependentSet, Kept, Monitor, solve, warm_up
from nearchord_solve.sweep import best_sets, counting
from nearchord_solve.sweep.kernels import deviate, lanes, passes, tally
from numba.core.dispatcher import Dispatcher

MODULES = {"deviate": deviate, "lanes": lanes, "tally": tally}


def entries() -> dict[str, Dispatcher]:
    """Kernels that the two sweeps call from outside; those that kernels call are compiled with them."""
    found: dict[str, Dispatcher] = {"choose_bag": passes.choose_bag, "choose_plain": passes.choose_plain}
    for caller in (best_sets, counting):
        assert caller.__file__ is not None
        for module, name in re.findall(r"\b(deviate|lanes|tally)\.([a-z_]+)\(", Path(caller.__file__).read_text()):
            found[name] = getattr(MODULES[module], name)
    return found


def test_every_kernel_is_called_with_one_set_of_types() -> None:
    """By the warm-up, and by solves whose arrays come from elsewhere: weights, pins, a kept structure."""
    warm_up(part="choosing")
    assert len(entries()) > 9
    for name, kernel in entries().items():
        assert len(kernel.signatures) == 1, f"{name} after the warm-up: {kernel.signatures}"
    edges = [(u, v) for v in range(12) for u in range(v) if (u * v + u + v) % 3 == 0]
    graph = Graph.from_edges(12, edges)
    for question in (IndependentSet(best=30, count=True), IndependentSet((2,), (5,), best=30, count=True)):
        outcome = solve(question, graph, np.arange(12) % 4, Budget(), "bound", Monitor())
        if outcome.kept is not None:
            kept = Kept.from_arrays(graph.n, graph.m, outcome.kept.arrays())
            solve(question, graph, np.arange(12) % 4, Budget(), "bound", Monitor(), kept)
    for name, kernel in entries().items():
        assert len(kernel.signatures) == 1, f"{name} in use: {kernel.signatures}"
