"""Answers, pins and bad arguments of independent-set and vertex-cover."""

import numpy as np
import pytest
from nearchord_solve import (
    QUESTIONS,
    Budget,
    Clique,
    ColourableSubgraph,
    Colouring,
    Fill,
    FractionalColouring,
    Graph,
    IndependentSet,
    InducedForest,
    Monitor,
    SolverError,
    Structure,
    Verdict,
    VertexCover,
)
from nearchord_solve import solve as solve_question

PATH = [(0, 1), (1, 2), (2, 3), (3, 4)]


def solve(question, graph, weights=None, budget=None, when_over="bound"):  # type: ignore[no-untyped-def]
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve_question(question, graph, array, budget or Budget(), when_over, Monitor())


def test_questions_are_found_by_their_wire_names() -> None:
    assert {
        "independent-set": IndependentSet,
        "vertex-cover": VertexCover,
        "clique": Clique,
        "colourable-subgraph": ColourableSubgraph,
        "induced-forest": InducedForest,
        "colouring": Colouring,
        "fractional-colouring": FractionalColouring,
        "fill": Fill,
        "structure": Structure,
    } == QUESTIONS


def test_independent_set_of_a_path() -> None:
    outcome = solve(IndependentSet(), Graph.from_edges(5, PATH), [5, 1, 1, 9, 3])
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, 14, 14)
    assert outcome.chosen.tolist() == [0, 3]
    assert outcome.chosen.dtype == np.uint32
    assert outcome.reason == "the graph is chordal: one sweep over its cliques settles it"


def test_vertex_cover_is_the_complement() -> None:
    outcome = solve(VertexCover(), Graph.from_edges(5, PATH), [5, 1, 1, 9, 3])
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, 5, 5)
    assert outcome.chosen.tolist() == [1, 2, 4]


def test_pins_of_independent_set() -> None:
    outcome = solve(IndependentSet(must=(1,), never=np.array([3])), Graph.from_edges(5, PATH), [5, 1, 1, 9, 3])
    assert (outcome.value, outcome.bound, outcome.chosen.tolist()) == (4, 4, [1, 4])


def test_pins_of_vertex_cover() -> None:
    outcome = solve(VertexCover(must=(3,), never=(1,)), Graph.from_edges(5, PATH), [5, 1, 1, 9, 3])
    assert (outcome.value, outcome.bound, outcome.chosen.tolist()) == (15, 15, [0, 2, 3])


def test_all_vertices_pinned() -> None:
    outcome = solve(IndependentSet(must=(0, 2, 4)), Graph.from_edges(5, PATH))
    assert (outcome.verdict, outcome.value, outcome.chosen.tolist()) == (Verdict.PROVEN, 3, [0, 2, 4])


@pytest.mark.parametrize(
    ("question", "reason"),
    [
        (IndependentSet(must=(4, 1, 2)), "adjacent vertices 1 and 2 both must be chosen"),
        (IndependentSet(must=(3, 0), never=(3,)), "vertex 3 must be chosen and must not be chosen"),
        (VertexCover(never=(4, 3)), "adjacent vertices 3 and 4 both must stay out of the cover"),
        (VertexCover(must=(2,), never=(2,)), "vertex 2 must stay out of the cover and must be in the cover"),
    ],
)
def test_contradicting_pins_are_infeasible_and_named(question: IndependentSet, reason: str) -> None:
    outcome = solve(question, Graph.from_edges(5, PATH))
    assert outcome.verdict is Verdict.INFEASIBLE
    assert outcome.reason == f"the pins contradict each other: {reason}"
    assert (outcome.value, outcome.bound, outcome.chosen.size) == (None, None, 0)


@pytest.mark.parametrize(
    ("question", "field", "message"),
    [
        (IndependentSet(must=(5,)), "question.must", "vertex 5 is out of range for 5 vertices"),
        (IndependentSet(never=(-1,)), "question.never", "vertex -1 is out of range for 5 vertices"),
        (VertexCover(must=("a",)), "question.must", "must be a list of vertices"),  # type: ignore[arg-type]
        (VertexCover(never=(0.5,)), "question.never", "must be a list of vertices"),  # type: ignore[arg-type]
    ],
)
def test_bad_pins_are_named(question: IndependentSet, field: str, message: str) -> None:
    with pytest.raises(SolverError) as caught:
        solve(question, Graph.from_edges(5, PATH))
    assert (caught.value.field, caught.value.message) == (field, message)


@pytest.mark.parametrize(
    ("weights", "message"),
    [
        (np.array([1, 2, -3, -4, 5]), "vertex 2: weight -3 is negative"),
        (np.array([2**61, 2**61, 0, 0, 0]), "must sum to less than 2**62"),
        (np.array([1, 2]), "must be an int64 array of 5, got int64(2,)"),
        (np.ones(5), "must be an int64 array of 5, got float64(5,)"),
    ],
)
def test_bad_weights_are_named(weights: np.ndarray, message: str) -> None:
    with pytest.raises(SolverError) as caught:
        solve_question(IndependentSet(), Graph.from_edges(5, PATH), weights, Budget(), "bound", Monitor())
    assert (caught.value.field, caught.value.message) == ("weights", message)


def test_bad_when_over_is_named() -> None:
    with pytest.raises(SolverError, match="when_over: must be 'bound' or 'stop', not 'wait'"):
        solve(IndependentSet(), Graph.from_edges(5, PATH), when_over="wait")


@pytest.mark.parametrize("budget", [{"fill": -1}, {"states": 0}, {"memory": 0}])
def test_bad_budgets_are_named(budget: dict[str, int]) -> None:
    with pytest.raises(SolverError, match=rf"budget\.{next(iter(budget))}: must be"):
        Budget(**budget)


def test_weights_close_to_the_limit_do_not_overflow() -> None:
    """A long odd cycle whose weights sum to 2^62 - 1; messages subtract and add such weights many times."""
    n = 9
    share = (2**62 - 1) // n
    weights = [share] * n
    weights[4] = 2**62 - 1 - share * (n - 1)
    edges = [(v, (v + 1) % n) for v in range(n)]
    outcome = solve(IndependentSet(), Graph.from_edges(n, edges), weights)
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.value == 3 * share + weights[4]


@pytest.mark.parametrize("n", [0, 1, 200_000])
@pytest.mark.parametrize("question", [IndependentSet(), VertexCover()])
def test_graphs_without_edges(question: IndependentSet, n: int) -> None:
    outcome = solve(question, Graph.from_edges(n, []))
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.value == outcome.bound == (n if isinstance(question, IndependentSet) else 0)
    assert (outcome.bags, outcome.parts, outcome.fill) == (n, n, 0)


def test_components_add_up() -> None:
    squares = [(4 * i + a, 4 * i + b) for i in range(5) for a, b in [(0, 1), (1, 2), (2, 3), (0, 3)]]
    outcome = solve(IndependentSet(), Graph.from_edges(23, squares))
    assert (outcome.value, outcome.fill_cores, outcome.fill) == (13, 5, 5)
    assert outcome.proof_kinds == ("certificate",) * 5


def test_the_same_question_has_the_same_answer() -> None:
    rng = np.random.default_rng(5)
    edges = [(u, v) for v in range(60) for u in range(v) if rng.random() < 0.12]
    graph = Graph.from_edges(60, edges)
    weights = rng.integers(0, 50, 60)
    for budget in (Budget(), Budget(states=50)):
        one, other = (solve_question(IndependentSet(), graph, weights, budget, "bound", Monitor()) for _ in range(2))
        assert one.chosen.tolist() == other.chosen.tolist()
        assert (one.value, one.bound, one.states, one.reason) == (
            other.value,
            other.bound,
            other.states,
            other.reason,
        )
