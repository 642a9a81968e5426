"""The heaviest independent set of at most so many vertices, against trial and integer programs."""

import networkx as nx
import numpy as np
import pytest
from definition import all_independent, is_independent
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Stop, Verdict, solve
from nearchord_solve.questions.addons.penalty import reachable
from networkx.generators.atlas import graph_atlas_g
from scipy.optimize import Bounds, LinearConstraint, milp
from scipy.sparse import lil_matrix

Pairs = list[tuple[int, int]]


def run(
    limit: int, n: int, edges: Pairs, weights: list[int] | None = None, monitor: Monitor | None = None,
    must: tuple[int, ...] = (), never: tuple[int, ...] = (), when_over: str = "bound", **budget: int,
) -> Outcome:  # fmt: skip
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    question = IndependentSet(must, never, limit=limit)
    return solve(question, Graph.from_edges(n, edges), array, Budget(**budget), when_over, monitor or Monitor())


def check(outcome: Outcome, best: int, limit: int, edges: Pairs, weights: list[int]) -> None:
    """Proven, feasible and worth what is said."""
    chosen = outcome.chosen.tolist()
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, best, best)
    assert len(chosen) <= limit
    assert is_independent(edges, chosen)
    assert sum(weights[v] for v in chosen) == best


def test_every_atlas_graph_agrees_with_trial() -> None:
    rng = np.random.default_rng(12)
    for graph in graph_atlas_g()[1:]:
        n, edges = graph.number_of_nodes(), [(min(e), max(e)) for e in graph.edges]
        weights = rng.integers(0, 6, n).tolist()
        known = all_independent(n, edges, weights)
        for limit in range(max(len(chosen) for _, chosen in known) + 1):
            best = max(value for value, chosen in known if len(chosen) <= limit)
            check(run(limit, n, edges, weights), best, limit, edges, weights)


@pytest.mark.parametrize("n", [9, 10, 11, 12])
def test_random_graphs_with_pins_agree_with_trial(n: int) -> None:
    """Vertices that must be chosen use some of the limit."""
    rng = np.random.default_rng(n)
    for trial in range(8):
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.1, 0.7), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(0, 20, n).tolist()
        picked = [int(v) for v in rng.permutation(n)]
        must, never = tuple(picked[: trial % 3]), tuple(picked[3:5])
        known = [one for one in all_independent(n, edges, weights) if one[1] >= set(must) and not one[1] & set(never)]
        for limit in range(n + 1):
            outcome = run(limit, n, edges, weights, must=must, never=never)
            values = [value for value, chosen in known if len(chosen) <= limit]
            if not values:
                assert outcome.verdict is Verdict.INFEASIBLE
                continue
            check(outcome, max(values), limit, edges, weights)
            assert set(must) <= set(outcome.chosen.tolist())
            assert not set(never) & set(outcome.chosen.tolist())


def stars(count: int) -> tuple[int, Pairs, list[int]]:
    """Stars, each worth 5, 6 and 9 with one, two and three vertices: a centre of 5, leaves of 3."""
    edges = [(4 * i, 4 * i + leaf) for i in range(count) for leaf in (1, 2, 3)]
    return 4 * count, edges, [5, 3, 3, 3] * count


def best_of_stars(count: int, limit: int) -> int:
    """Star by star."""
    best = [0] * (limit + 1)
    for _ in range(count):
        best = [max(best[c - k] + worth for k, worth in enumerate((0, 5, 6, 9)) if k <= c) for c in range(limit + 1)]
    return best[limit]


@pytest.mark.parametrize("count", [1, 2, 7])
def test_where_the_value_is_not_concave_states_settle_it(count: int) -> None:
    """Penalties leave a gap at every second limit above one vertex a star."""
    n, edges, weights = stars(count)
    for limit in range(n + 1):
        outcome = run(limit, n, edges, weights)
        check(outcome, best_of_stars(count, limit), limit, edges, weights)
        gap = count < limit < 3 * count and (limit - count) % 2 == 1
        assert outcome.reason.endswith("states by numbers of vertices settled it") == gap


def test_a_gap_too_large_for_the_budget_is_stated() -> None:
    """The bound of the penalties and the set that they lead to remain."""
    n, edges, weights = stars(60)
    outcome = run(101, n, edges, weights, states=200)
    assert outcome.verdict is Verdict.BOUNDED
    assert outcome.value <= best_of_stars(60, 101) < outcome.bound <= outcome.value + 1
    assert outcome.proof == "search"
    assert outcome.reason.endswith(": a gap is left that takes more than 200 states by numbers of vertices to close")


def windows(n: int, reach: int, removed: int, seed: int) -> nx.Graph:
    """A power of a path, shuffled, with some edges removed: nearly chordal."""
    rng = np.random.default_rng(seed)
    graph = nx.power(nx.path_graph(n), reach)
    edges = sorted(graph.edges)
    graph.remove_edges_from([edges[i] for i in rng.choice(len(edges), removed, replace=False)])
    return nx.relabel_nodes(graph, dict(enumerate(int(v) for v in rng.permutation(n))))


def milp_within(graph: nx.Graph, weights: list[int], limit: int) -> int:
    """HiGHS: one vertex of each maximal clique, ``limit`` of all."""
    cliques = list(nx.find_cliques(graph))
    rows = lil_matrix((len(cliques) + 1, len(weights)))
    for i, clique in enumerate(cliques):
        rows[i, clique] = 1
    rows[len(cliques), :] = 1
    most = np.array([1] * len(cliques) + [limit])
    found = milp(
        -np.array(weights), constraints=LinearConstraint(rows.tocsr(), ub=most), bounds=Bounds(0, 1),
        integrality=np.ones(len(weights)),
    )  # fmt: skip
    return round(-found.fun)


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("most_weight", [3, 1000])
def test_larger_graphs_agree_with_integer_programs(seed: int, most_weight: int) -> None:
    graph = windows(120, 5, 30, seed)
    weights = np.random.default_rng(seed).integers(1, most_weight, 120).tolist()
    edges = [(min(e), max(e)) for e in graph.edges]
    for limit in (1, 5, 13, 18, 22):
        check(run(limit, 120, edges, weights), milp_within(graph, weights, limit), limit, edges, weights)


def test_states_alone_agree_with_penalties(monkeypatch: pytest.MonkeyPatch) -> None:
    """Without sweeps the program over numbers of vertices settles every limit."""
    from nearchord_solve.questions.addons import penalty

    graph = windows(60, 4, 20, 9)
    edges = [(min(e), max(e)) for e in graph.edges]
    weights = np.random.default_rng(9).integers(1, 50, 60).tolist()
    usual = [run(limit, 60, edges, weights).value for limit in range(20)]
    monkeypatch.setattr(penalty, "MOST_SWEEPS", 0)
    for limit in range(1, 20):
        check(run(limit, 60, edges, weights), usual[limit], limit, edges, weights)


@pytest.mark.parametrize("seed", range(30))
def test_exchanges_reach_the_largest_size_within_the_room(seed: int) -> None:
    """Against all choices of gains; no gain is taken twice."""
    rng = np.random.default_rng(seed)
    gains = rng.integers(0, 5, int(rng.integers(0, 11))).tolist()
    sums = {0}
    for gain in gains:
        sums |= {known + gain for known in sums}
    for room in range(sum(gains) + 2):
        taken = reachable(gains, room)
        assert len(set(taken)) == len(taken)
        assert sum(gains[i] for i in taken) == max(known for known in sums if known <= room)


def test_limit_zero_is_the_empty_set() -> None:
    outcome = run(0, 3, [(0, 1)])
    assert (outcome.verdict, outcome.value, outcome.bound, outcome.chosen.size) == (Verdict.PROVEN, 0, 0, 0)


def test_a_limit_that_is_not_reached_changes_nothing() -> None:
    """The certificate of the answer without a limit stands."""
    n, edges, weights = stars(3)
    plain = solve(IndependentSet(), Graph.from_edges(n, edges), np.array(weights), Budget(), "bound", Monitor())
    outcome = run(9, n, edges, weights)
    assert outcome.chosen.tolist() == plain.chosen.tolist()
    assert (outcome.value, outcome.proof) == (plain.value, "certificate")
    assert set(outcome.columns) == set(plain.columns)
    assert outcome.reason == f"{plain.reason}; the limit of 9 leaves it as it is"
    assert run(8, n, edges, weights).proof == "search"


def test_more_that_must_be_chosen_than_may_be_is_infeasible() -> None:
    outcome = run(1, 3, [(0, 1)], must=(0, 2))
    assert outcome.verdict is Verdict.INFEASIBLE
    assert outcome.reason == "the pins contradict the limit: 2 vertices must be chosen, 1 may be"
    assert run(2, 3, [(0, 1)], must=(0, 2)).value == 2


def test_contradicting_pins_come_before_the_limit() -> None:
    assert "adjacent vertices 0 and 1 both must be chosen" in run(0, 3, [(0, 1)], must=(0, 1)).reason


def test_weights_close_to_the_limit_of_sums_do_not_overflow() -> None:
    """Penalties are rounded where scaling the weights would leave int64."""
    n, edges = 12, [(v, v + 1) for v in range(11)]
    weights = [2**61 // 13 * (3 if v % 4 == 0 else 1) + v for v in range(n)]
    known = all_independent(n, edges, weights)
    for limit in range(n):
        best = max(value for value, chosen in known if len(chosen) <= limit)
        check(run(limit, n, edges, weights), best, limit, edges, weights)


@pytest.mark.parametrize("budget", [{"states": 3}, {"memory": 1}, {"memory": 2**20 + 20_000}])
@pytest.mark.parametrize("when_over", ["bound", "stop"])
def test_small_budgets_leave_a_feasible_choice_and_a_valid_bound(budget: dict[str, int], when_over: str) -> None:
    graph = windows(40, 4, 15, 1)
    edges = [(min(e), max(e)) for e in graph.edges]
    weights = np.random.default_rng(1).integers(1, 50, 40).tolist()
    for limit in (1, 4, 40):
        exact, outcome = run(limit, 40, edges, weights), run(limit, 40, edges, weights, when_over=when_over, **budget)
        assert outcome.value <= exact.value <= outcome.bound
        assert outcome.chosen.size <= limit
        assert is_independent(edges, outcome.chosen.tolist())
        assert sum(weights[v] for v in outcome.chosen.tolist()) == outcome.value


class StopInPhase:
    """A monitor that is told to stop when it has entered so many phases."""

    def __init__(self, stop: Stop, phases: int) -> None:
        self.left = phases
        self.monitor = Monitor(on_phase=lambda phase: self._count(stop))

    def _count(self, stop: Stop) -> None:
        self.left -= 1
        if self.left == 0:
            self.monitor.cells[Monitor.STOP] = stop


@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
@pytest.mark.parametrize("phases", range(1, 10))
def test_a_stop_is_heeded_at_any_time(stop: Stop, phases: int) -> None:
    n, edges, weights = stars(9)
    outcome = run(14, n, edges, weights, StopInPhase(stop, phases).monitor)
    if outcome.verdict is Verdict.CANCELLED:
        assert stop is Stop.CANCEL
        assert outcome.value is None
        return
    assert outcome.value <= best_of_stars(9, 14) <= outcome.bound
    assert outcome.chosen.size <= 14
    assert is_independent(edges, outcome.chosen.tolist())


def test_sets_without_the_limit_are_not_reported_as_reached() -> None:
    """The heaviest set is too large to be an answer; the monitor shows only what is one, and the final bound."""
    seen = []
    monitor = Monitor(on_phase=lambda phase: seen.append(int(monitor.cells[Monitor.INCUMBENT])))
    n, edges, weights = stars(9)
    outcome = run(5, n, edges, weights, monitor)
    assert outcome.value == 25
    assert max(seen) <= 25
    assert monitor.cells[Monitor.INCUMBENT] == monitor.cells[Monitor.BOUND] == 25
