"""Budgets that run out, stops at injected moments: always a valid pair and a reason."""

import numpy as np
import pytest
from definition import heaviest_independent, is_independent
from nearchord_solve import (
    Budget,
    Fill,
    Graph,
    IndependentSet,
    Monitor,
    Outcome,
    Phase,
    Stop,
    Verdict,
    predicted_bytes,
    solve,
)
from nearchord_solve import memory as memory_module
from nearchord_solve import tree as tree_module


def random_edges(n: int, density: float, seed: int) -> list[tuple[int, int]]:
    """Edges of a random graph."""
    rng = np.random.default_rng(seed)
    return [(u, v) for v in range(n) for u in range(v) if rng.random() < density]


N = 16
EDGES = random_edges(N, 0.25, 1)
WEIGHTS = np.random.default_rng(2).integers(1, 30, N)
BEST = heaviest_independent(N, EDGES, WEIGHTS.tolist())
SQUARE = [(0, 1), (1, 2), (2, 3), (0, 3)]
QUEENS = (
    25,
    [
        (u, v)
        for v in range(25)
        for u in range(v)
        if u // 5 == v // 5 or u % 5 == v % 5 or abs(u // 5 - v // 5) == abs(u % 5 - v % 5)
    ],
)


def run(budget: Budget, when_over: str, monitor: Monitor | None = None) -> Outcome:
    """Solve the small random graph."""
    graph = Graph.from_edges(N, EDGES)
    return solve(IndependentSet(), graph, WEIGHTS, budget, when_over, monitor or Monitor())


def assert_valid_pair(outcome: Outcome) -> None:
    """A feasible set of the stated value, an upper bound, and a reason."""
    assert outcome.verdict is (Verdict.PROVEN if outcome.value == outcome.bound else Verdict.BOUNDED)
    assert is_independent(EDGES, outcome.chosen.tolist())
    assert outcome.value == WEIGHTS[outcome.chosen].sum()
    assert outcome.value <= BEST <= outcome.bound
    assert outcome.reason


@pytest.mark.parametrize("when_over", ["bound", "stop"])
@pytest.mark.parametrize("states", [1, 5, 30, 100])
def test_too_few_states_end_with_an_interval(states: int, when_over: str) -> None:
    outcome = run(Budget(states=states), when_over)
    assert_valid_pair(outcome)
    assert "state budget" in outcome.reason


def test_parts_that_fit_are_settled_exactly_though_others_do_not() -> None:
    """One square and one large core: the state budget admits the square only."""
    n = 4 + N
    edges = SQUARE + [(u + 4, v + 4) for u, v in EDGES]
    weights = np.concatenate(([5, 1, 5, 1], WEIGHTS))
    graph = Graph.from_edges(n, edges)
    whole = solve(IndependentSet(), graph, weights, Budget(states=10), "stop", Monitor())
    alone = run(Budget(states=10), "stop")
    assert whole.value - 10 == alone.value
    assert whole.bound - 10 == alone.bound


@pytest.mark.parametrize("when_over", ["bound", "stop"])
def test_too_little_memory_ends_with_an_interval(when_over: str) -> None:
    outcome = run(Budget(memory=1), when_over)
    assert_valid_pair(outcome)
    assert "memory budget" in outcome.reason


@pytest.mark.parametrize("when_over", ["bound", "stop"])
def test_fill_beyond_all_room_ends_with_an_interval(when_over: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(memory_module, "FILL_ROOM", -2 * len(EDGES))
    outcome = run(Budget(), when_over)
    assert_valid_pair(outcome)
    assert outcome.fill is None
    assert "fill of the graph is too large" in outcome.reason


@pytest.mark.parametrize("memory", [2**20, 2**21])
def test_tables_that_do_not_fit_into_memory_are_not_built(memory: int) -> None:
    """A bag of many independent vertices needs a large table on its adhesion."""
    side = 16
    edges = [(u, v) for u in range(side) for v in range(side, 2 * side)]
    edges += [(v, v + side) for v in range(side, 2 * side)]
    graph = Graph.from_edges(3 * side, edges)
    held = predicted_bytes(graph.n, graph.m) + 2**19
    outcome = solve(IndependentSet(), graph, None, Budget(memory=held), "stop", Monitor())
    assert outcome.value is not None
    assert outcome.value <= 2 * side <= outcome.bound
    full = solve(IndependentSet(), graph, None, Budget(), "stop", Monitor())
    assert (full.verdict, full.value) == (Verdict.PROVEN, 2 * side)


def test_over_fill_only_when_the_lower_bound_says_so() -> None:
    square = Graph.from_edges(4, SQUARE)
    outcome = solve(IndependentSet(), square, None, Budget(fill=0), "stop", Monitor())
    assert outcome.verdict is Verdict.OVER_FILL
    assert outcome.reason == "fill budget: at least 1 fill edge is needed, 0 are allowed"
    assert (outcome.value, outcome.bound, outcome.fill, outcome.fill_lower_bound) == (None, None, 1, 1)


def test_fill_budget_of_zero_allows_chordal_graphs() -> None:
    path = Graph.from_edges(3, [(0, 1), (1, 2)])
    assert solve(IndependentSet(), path, None, Budget(fill=0), "stop", Monitor()).verdict is Verdict.PROVEN


def test_more_fill_than_budgeted_is_used_and_said() -> None:
    outcome = run(Budget(fill=0), "bound")
    assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, BEST)
    assert "more fill than the 0 budgeted" in outcome.reason


HARD_FILL = (14, random_edges(14, 0.3, 9))  # no greedy rule comes near its least fill


def least_fill_found() -> int:
    outcome = solve(Fill(), Graph.from_edges(*HARD_FILL), None, Budget(), "bound", Monitor())
    assert outcome.verdict is Verdict.PROVEN
    return outcome.value


@pytest.mark.parametrize(("when_over", "states"), [("stop", 10**7), ("bound", 30)])
def test_exact_search_meets_fill_budgets_that_heuristics_do_not(
    when_over: str, states: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Before a job may end over its fill budget, or without a proof."""
    least = least_fill_found()
    graph = Graph.from_edges(*HARD_FILL)
    greedy = tree_module.build_structure(graph, Budget(fill=least), Monitor())
    assert greedy.fill > least
    outcome = solve(IndependentSet(), graph, None, Budget(fill=least, states=states), when_over, Monitor())
    if outcome.states <= states:
        assert outcome.verdict is Verdict.PROVEN
        assert outcome.fill == least
    assert outcome.fill_lower_bound == least


def test_exact_search_proves_that_a_fill_budget_is_too_small() -> None:
    """Where the bounds of the heuristics leave it open."""
    least = least_fill_found()
    graph = Graph.from_edges(*HARD_FILL)
    assert tree_module.build_structure(graph, Budget(fill=least - 1), Monitor()).fill_lower_bound < least
    outcome = solve(IndependentSet(), graph, None, Budget(fill=least - 1), "stop", Monitor())
    assert outcome.verdict is Verdict.OVER_FILL
    assert outcome.reason == f"fill budget: at least {least} fill edges are needed, {least - 1} are allowed"


def test_a_search_for_less_fill_that_is_stopped_is_bounded_with_stop() -> None:
    """With what is known by then."""

    def stop_there(phase: Phase) -> None:
        if phase is Phase.IMPROVE:
            monitor.cells[Monitor.STOP] = Stop.SECONDS

    monitor = Monitor(on_phase=stop_there)
    outcome = solve(IndependentSet(), Graph.from_edges(*QUEENS), None, Budget(fill=92), "stop", monitor)
    assert outcome.verdict is Verdict.BOUNDED
    assert outcome.value <= 5 <= outcome.bound
    assert outcome.fill_lower_bound <= 93 <= outcome.fill
    assert outcome.reason.startswith("fill budget: ")
    assert outcome.reason.endswith("seconds ran out in the search for fewer")


def test_least_fill_is_taken_when_the_budget_asks_for_it() -> None:
    """A budget that only the triangulation with less fill meets is met."""
    met = False
    for seed in range(60):
        edges = random_edges(20, 0.2, seed)
        graph = Graph.from_edges(20, edges)
        free = solve(IndependentSet(), graph, None, Budget(), "stop", Monitor())
        assert free.fill is not None
        if free.fill == 0:
            continue
        tight = solve(IndependentSet(), graph, None, Budget(fill=free.fill - 1), "bound", Monitor())
        assert (tight.verdict, tight.value) == (Verdict.PROVEN, free.value)
        met = met or tight.fill <= free.fill - 1
    assert met


@pytest.mark.parametrize("states", [1, 10**7])
@pytest.mark.parametrize("phase", [p for p in Phase if p is not Phase.DONE])
def test_seconds_that_run_out_at_any_phase_leave_a_valid_pair(phase: Phase, states: int) -> None:
    def stop_there(entered: Phase) -> None:
        if entered is phase:
            monitor.cells[Monitor.STOP] = Stop.SECONDS

    monitor = Monitor(on_phase=stop_there)
    outcome = run(Budget(states=states), "bound", monitor)
    assert_valid_pair(outcome)
    if outcome.verdict is Verdict.BOUNDED:
        assert "seconds ran out" in outcome.reason


@pytest.mark.parametrize("states", [1, 10**7])
@pytest.mark.parametrize("phase", [p for p in Phase if p is not Phase.DONE])
def test_cancel_at_any_phase_ends_without_an_answer(phase: Phase, states: int) -> None:
    entered: list[Phase] = []

    def cancel_there(now: Phase) -> None:
        entered.append(now)
        if now is phase:
            monitor.cells[Monitor.STOP] = Stop.CANCEL

    monitor = Monitor(on_phase=cancel_there)
    outcome = run(Budget(states=states), "bound", monitor)
    if phase in entered:
        assert outcome.verdict is Verdict.CANCELLED
        assert (outcome.value, outcome.bound, outcome.chosen.size) == (None, None, 0)
        assert outcome.reason == "cancelled on request"
    else:
        assert outcome.verdict is Verdict.PROVEN


def test_predicted_memory_grows_with_the_graph() -> None:
    assert predicted_bytes(10**6, 10**7) > predicted_bytes(10**5, 10**6) > predicted_bytes(0, 0) > 0
