"""Kept structures: the same answers with and without, and nothing is believed that does not fit."""

import numpy as np
import pytest
from bench.generators import time_windows
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord_solve import (
    Budget,
    Fill,
    Graph,
    IndependentSet,
    Kept,
    Monitor,
    Outcome,
    Phase,
    SolverError,
    Structure,
    VertexCover,
    predicted_bytes,
    solve,
)
from nearchord_solve.questions import Question
from strategies import Edges, graphs, weighted_graphs

QUESTIONS = [IndependentSet(), VertexCover(), Fill(), Structure()]
SQUARE = (4, [(0, 1), (1, 2), (2, 3), (0, 3)])


def run(
    question: Question, edges: Edges, weights=None, budget: Budget | None = None, kept: Kept | None = None
) -> Outcome:
    weights = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(*edges), weights, budget or Budget(), "bound", Monitor(), kept)


def stored(kept: Kept) -> Kept:
    """As it comes back from a file: other arrays with the same content."""
    return Kept.from_arrays(kept.n, kept.m, {name: array.copy() for name, array in kept.arrays().items()})


def content(outcome: Outcome) -> dict[str, object]:
    """Everything an outcome says, comparable."""
    values = {name: value for name, value in vars(outcome).items() if name not in ("kept", "chosen", "columns")}
    values["chosen"] = None if outcome.chosen is None else outcome.chosen.tolist()
    values["columns"] = {name: (array.dtype, array.tolist()) for name, array in outcome.columns.items()}
    return values


@settings(deadline=None)
@given(weighted_graphs(), st.sampled_from(QUESTIONS), st.sampled_from(QUESTIONS))
def test_answers_are_the_same_with_what_another_question_left(drawn, first: Question, second: Question) -> None:
    n, edges, weights = drawn
    left = run(first, (n, edges)).kept
    assert left is not None
    again = run(second, (n, edges), weights, kept=stored(left))
    assert content(again) == content(run(second, (n, edges), weights))
    assert again.kept is None


BUDGETS = st.builds(
    Budget,
    fill=st.none() | st.integers(0, 20),
    states=st.integers(1, 400),
    memory=st.sampled_from([2**20 + 3000, 2**20 + 8000, 2**30]),
)


@settings(deadline=None, max_examples=300)
@given(graphs(), BUDGETS, BUDGETS)
def test_answers_are_the_same_with_what_another_budget_left(edges: Edges, first: Budget, second: Budget) -> None:
    """It is used only where it serves."""
    left = run(IndependentSet(), edges, budget=first).kept
    if left is not None:
        again = run(IndependentSet(), edges, budget=second, kept=stored(left))
        assert content(again) == content(run(IndependentSet(), edges, budget=second))


def test_a_structure_serves_budgets_that_lead_to_it() -> None:
    """One fill edge; four vertices, for which 32 states would be taken at once."""
    left = run(IndependentSet(), SQUARE).kept
    assert left.serves(Budget())
    assert left.serves(Budget(fill=1, states=32, memory=2**29))
    assert not left.serves(Budget(fill=0))
    assert not left.serves(Budget(states=31))
    assert not left.serves(Budget(memory=predicted_bytes(4, 4)))


def test_a_structure_built_for_a_tight_budget_serves_that_budget_only() -> None:
    tight = Budget(fill=0)
    left = run(IndependentSet(), SQUARE, budget=tight).kept
    assert left.serves(tight)
    assert not left.serves(Budget(fill=1))
    assert not left.serves(Budget())


def test_pinned_vertices_neither_use_nor_leave_a_structure() -> None:
    """The graph that is swept is another one."""
    left = run(IndependentSet(), SQUARE).kept
    pinned = IndependentSet(must=(0,))
    again = run(pinned, SQUARE, kept=left)
    assert content(again) == content(run(pinned, SQUARE))
    assert again.kept is None


def test_neighbours_are_not_read_where_a_structure_serves() -> None:
    """A second job with other weights goes straight to the sweep."""
    windows = time_windows(500, 10.0, 20, 1)
    graph = Graph.from_canonical(windows.n, *windows.canonical())
    left = solve(IndependentSet(), graph, None, Budget(), "bound", Monitor()).kept

    def unread() -> tuple[np.ndarray, np.ndarray]:
        raise AssertionError("the rows were read")

    phases: list[Phase] = []
    monitor = Monitor(on_phase=phases.append)
    again = solve(
        IndependentSet(), Graph(graph.n, graph.m, unread), windows.weights, Budget(), "bound", monitor, stored(left)
    )
    assert content(again) == content(solve(IndependentSet(), graph, windows.weights, Budget(), "bound", Monitor()))
    assert Phase.ORDER not in phases
    assert Phase.FILL not in phases


def test_a_structure_of_another_size_is_refused() -> None:
    left = run(IndependentSet(), SQUARE).kept
    with pytest.raises(SolverError, match="4 vertices and 4 edges"):
        run(IndependentSet(), (5, SQUARE[1]), kept=left)
    with pytest.raises(SolverError, match="4 vertices and 4 edges"):
        Kept.from_arrays(5, 4, left.arrays())


def broken_arrays() -> list[tuple[str, str]]:
    names = run(IndependentSet(), SQUARE).kept.arrays()
    return [(name, how) for name in names for how in ("missing", "short", "other type", "wild", "read-only")]


@pytest.mark.parametrize(("name", "how"), broken_arrays())
def test_arrays_that_do_not_fit_are_refused(name: str, how: str) -> None:
    """Whatever is missing, too short, of another type or points outside."""
    arrays = {key: array.copy() for key, array in run(IndependentSet(), SQUARE).kept.arrays().items()}
    if how == "missing":
        del arrays[name]
    elif how == "short":
        arrays[name] = arrays[name][: max(arrays[name].size - 1, 0)]
        if arrays[name].size == run(IndependentSet(), SQUARE).kept.arrays()[name].size:
            return
    elif how == "other type":
        arrays[name] = arrays[name].astype(np.float64)
    elif how == "read-only":
        arrays[name].flags.writeable = False
    elif name in ("bag_kind", "figures", "header"):
        return  # numbers that point nowhere
    else:
        arrays[name][...] = 10**6
        if arrays[name].size == 0:
            return
    with pytest.raises(SolverError, match="kept"):
        Kept.from_arrays(*SQUARE[:1], len(SQUARE[1]), arrays)
