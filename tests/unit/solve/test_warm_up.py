"""After the warm-up nothing is compiled any more, whatever is asked and wherever the arrays come from."""

from __future__ import annotations

import importlib
import json
import pkgutil
import subprocess
import sys
from pathlib import Path

import nearchord_solve as ns
import numpy as np
import pytest
from numba.core.dispatcher import Dispatcher

ASKED = (
    ns.IndependentSet(),
    ns.IndependentSet((2,), (5,)),
    ns.IndependentSet(prices=True, conflict_prices=True, best=30, count=True),
    ns.IndependentSet((2,), (5,), prices=True, conflict_prices=True, best=3, count=True),
    ns.IndependentSet(limit=2),
    ns.IndependentSet(scenarios=3),
    ns.VertexCover((2,), (5,)),
    ns.Clique(),
    ns.Clique((2,), (5,)),
    ns.ColourableSubgraph(1),
    ns.ColourableSubgraph(colours=2, prices=True),
    ns.ColourableSubgraph(2, (2,), (5,)),
    ns.ColourableSubgraph(3, (2,), (5,), prices=True),
    ns.ColourableSubgraph(colours=4, scenarios=3),
    ns.InducedForest((2,), (5,), prices=True),
    ns.InducedForest(scenarios=3),
    ns.Colouring(),
    ns.FractionalColouring(),
    ns.Fill(),
    ns.Structure(),
)
BUDGETS = (ns.Budget(), ns.Budget(states=1), ns.Budget(memory=1), ns.Budget(fill=0))


def kernels() -> dict[str, Dispatcher]:
    """Every kernel of the solver by its name."""
    found = {}
    for info in pkgutil.walk_packages(ns.__path__, "nearchord_solve."):
        for value in vars(importlib.import_module(info.name)).values():
            if isinstance(value, Dispatcher):
                found[f"{value.py_func.__module__}.{value.py_func.__name__}"] = value
    return found


def graphs() -> list[ns.Graph]:
    """A chordal graph, sparse and dense ones with fill, and one with a core that needs a search, as a worker has them:
    read-only arrays over bytes."""
    size = 14
    rules = (
        lambda u, v: v - u < 3,
        lambda u, v: (u * v + u + v) % 3 == 0,
        lambda u, v: (u * v + u + v) % 5 < 3,
        lambda u, v: (u + v) % 4 == 1 or v - u == 1,
    )
    made = []
    for joined in rules:
        pairs = [(u, v) for u in range(size) for v in range(u + 1, size) if joined(u, v)]
        start = np.cumsum([0, *(sum(u == row for u, _ in pairs) for row in range(size))])
        arrays = (np.asarray(start, np.uint64), np.array([v for _, v in pairs], np.uint32))
        made.append(ns.Graph.from_canonical(size, *(np.frombuffer(a.tobytes(), a.dtype) for a in arrays)))
    return made


def ask(graph: ns.Graph, question: ns.Question, budget: ns.Budget, kept: ns.Kept | None = None) -> ns.Outcome:
    """One solve with the weights in the shape that the question takes."""
    vectors = getattr(question, "scenarios", 0)
    weights = np.arange(max(1, vectors) * graph.n, dtype=np.int64) % 5
    if isinstance(question, ns.Colouring | ns.FractionalColouring):
        weights = weights % 3
    shaped = weights.reshape(vectors, graph.n) if vectors else weights
    return ns.solve(question, graph, shaped, budget, "bound", ns.Monitor(), kept)


def grown() -> dict[str, int]:
    """Kernels that were compiled, or loaded, after the warm-up: none should be."""
    ns.warm_up()
    before = {name: len(kernel.signatures) for name, kernel in kernels().items()}
    for graph in graphs():
        for question in ASKED:
            for budget in BUDGETS:
                kept = ask(graph, question, budget).kept
                if kept is not None:
                    again = ns.Kept.from_arrays(graph.n, graph.m, kept.arrays())
                    ask(graph, question, budget, again)
    after = {name: len(kernel.signatures) for name, kernel in kernels().items()}
    return {name: count - before.get(name, 0) for name, count in after.items() if count > before.get(name, 0)}


@pytest.mark.timeout(900)  # a first run compiles everything
def test_nothing_is_compiled_after_the_warm_up() -> None:
    """In a process of its own, as a worker is: what other tests called before would hide what is missing."""
    words = [sys.executable, "-c", "import json, test_warm_up; print(json.dumps(test_warm_up.grown()))"]
    done = subprocess.run(words, capture_output=True, text=True, timeout=840, cwd=Path(__file__).parent, check=False)
    assert done.returncode == 0, done.stderr
    assert json.loads(done.stdout) == {}
