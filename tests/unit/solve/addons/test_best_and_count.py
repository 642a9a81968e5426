"""The k best independent sets, and how many are best, against all of them."""

from collections.abc import Iterator
from itertools import count as numbers
from itertools import pairwise

import networkx as nx
import numpy as np
import pytest
from definition import all_independent
from nearchord_solve import Budget, Graph, IndependentSet, Monitor, Outcome, Phase, Stop, Verdict, solve
from nearchord_solve.sweep import counting
from networkx.generators.atlas import graph_atlas_g
from scipy.optimize import Bounds, LinearConstraint, milp

Pairs = list[tuple[int, int]]


def run(question: IndependentSet, n: int, edges: Pairs, weights: list[int] | None = None, **budget: int) -> Outcome:
    """Solve with defaults."""
    array = None if weights is None else np.array(weights, np.int64)
    return solve(question, Graph.from_edges(n, edges), array, Budget(**budget), "bound", Monitor())


def best_of(outcome: Outcome) -> list[tuple[int, frozenset[int]]]:
    """The columns of the best sets, read; vertices must ascend in each."""
    start, chosen = outcome.columns["best_start"].tolist(), outcome.columns["best_chosen"].tolist()
    assert outcome.columns["best_chosen"].dtype == np.uint32
    assert start[0] == 0
    assert start[-1] == len(chosen)
    sets = [chosen[begin:end] for begin, end in pairwise(start)]
    assert all(one == sorted(set(one)) for one in sets)
    return list(zip(outcome.columns["best_value"].tolist(), map(frozenset, sets), strict=True))


def check(outcome: Outcome, known: list[tuple[int, frozenset[int]]], most: int) -> None:
    """The sets are the best ones of all that are known, each once, the answer's own choice first."""
    found = best_of(outcome)
    assert [value for value, _ in found] == [value for value, _ in known[:most]]
    assert len(set(found)) == len(found)
    assert set(found) <= set(known)
    assert found[0] == (outcome.value, frozenset(outcome.chosen.tolist()))
    assert outcome.count == sum(value == known[0][0] for value, _ in known)


def test_every_atlas_graph_agrees_with_trial() -> None:
    rng = np.random.default_rng(11)
    for number, graph in enumerate(graph_atlas_g()[1:]):
        n, edges = graph.number_of_nodes(), [(min(e), max(e)) for e in graph.edges]
        weights = rng.integers(0, (1, 2, 3, 9)[number % 4], n).tolist()
        most = int(rng.choice([2, 5, 1000]))
        outcome = run(IndependentSet(best=most, count=True), n, edges, weights)
        check(outcome, all_independent(n, edges, weights), most)


@pytest.mark.parametrize("n", [9, 10, 11, 12])
def test_random_graphs_with_pins_agree_with_trial(n: int) -> None:
    """Two sorts of weights: many ties, and few."""
    rng = np.random.default_rng(n)
    for trial in range(12):
        upper = np.triu(rng.random((n, n)) < rng.uniform(0.1, 0.9), 1)
        edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
        weights = rng.integers(0, (3, 1000)[trial % 2], n).tolist()
        picked = [int(v) for v in rng.permutation(n)]
        must, never = picked[: trial % 3], picked[3:5]
        known = [one for one in all_independent(n, edges, weights) if one[1] >= set(must) and not one[1] & set(never)]
        outcome = run(IndependentSet(must, never, best=40, count=True), n, edges, weights)
        if known:
            check(outcome, known, 40)
        else:
            assert outcome.verdict is Verdict.INFEASIBLE
            assert outcome.count is None


def windows(n: int, reach: int, removed: int, seed: int) -> nx.Graph:
    """A power of a path with some edges removed: nearly chordal."""
    rng = np.random.default_rng(seed)
    graph = nx.power(nx.path_graph(n), reach)
    edges = sorted(graph.edges)
    graph.remove_edges_from([edges[i] for i in rng.choice(len(edges), removed, replace=False)])
    return graph


def values_by_milp(graph: nx.Graph, weights: list[int], most: int) -> list[int]:
    """HiGHS, one vertex of each maximal clique; each set found is cut off before the next is asked for."""
    cliques = list(nx.find_cliques(graph))
    rows = np.zeros((len(cliques), len(weights)))
    for i, clique in enumerate(cliques):
        rows[i, clique] = 1
    upper = [1] * len(cliques)
    values = []
    for _ in range(most):
        found = milp(
            -np.array(weights), constraints=LinearConstraint(rows, ub=upper), bounds=Bounds(0, 1),
            integrality=np.ones(len(weights)),
        )  # fmt: skip
        inside = np.round(found.x)
        values.append(int(inside @ weights))
        rows = np.vstack((rows, 2 * inside - 1))
        upper.append(inside.sum() - 1)
    return values


@pytest.mark.parametrize("seed", range(3))
def test_larger_graphs_agree_with_an_integer_program(seed: int) -> None:
    graph = windows(80, 5, 25, seed)
    weights = np.random.default_rng(seed).integers(1, 100, 80).tolist()
    outcome = run(IndependentSet(best=12), 80, list(graph.edges), weights)
    assert [value for value, _ in best_of(outcome)] == values_by_milp(graph, weights, 12)


def test_all_there_are_is_fewer_than_asked_for() -> None:
    """A triangle with a tail has seven independent sets; all weigh nothing, so all seven are best."""
    outcome = run(IndependentSet(best=1000, count=True), 4, [(0, 1), (0, 2), (1, 2), (2, 3)], [0, 0, 0, 0])
    assert len(best_of(outcome)) == 7
    assert outcome.count == 7


@pytest.mark.parametrize("n", [0, 1])
def test_tiny_graphs(n: int) -> None:
    outcome = run(IndependentSet(best=5, count=True), n, [])
    assert outcome.count == 1
    assert best_of(outcome) == [(n, frozenset(range(n))), (0, frozenset())][: n + 1]


def test_all_vertices_pinned_leave_one_set() -> None:
    outcome = run(IndependentSet(must=(0, 2), never=(1,), best=5, count=True), 3, [(0, 1), (1, 2)])
    assert best_of(outcome) == [(2, frozenset({0, 2}))]
    assert outcome.count == 1


def test_weights_close_to_the_limit_do_not_overflow() -> None:
    """Odd cycle of weights that sum to 2^62 - 1: residuals leave int64, differences of states do not."""
    n, edges = 9, [(v, (v + 1) % 9) for v in range(9)]
    share = (2**62 - 1) // n
    weights = [share] * 8 + [2**62 - 1 - 8 * share]
    outcome = run(IndependentSet(best=200, count=True), n, edges, weights)
    check(outcome, all_independent(n, edges, weights), 200)


def braced(n: int) -> tuple[int, Pairs, list[int]]:
    """A cycle with every second vertex linked too, and weights with ties."""
    edges = {(min(v, u), max(v, u)) for v in range(n) for u in ((v + 1) % n, (v + 2) % n)}
    return n, sorted(edges), [1 + v % 3 for v in range(n)]


def test_without_tables_there_is_neither_and_the_reason_says_so() -> None:
    outcome = run(IndependentSet(best=3, count=True), *braced(12), states=1)
    assert outcome.count is None
    assert "best_value" not in outcome.columns
    assert outcome.reason.endswith("without the best sets and the count: that takes an optimum proven by tables")


def test_the_answer_itself_is_that_without_add_ons() -> None:
    """Columns of the certificate included."""
    plain, more = run(IndependentSet(), *braced(14)), run(IndependentSet(best=3, count=True), *braced(14))
    assert more.chosen.tolist() == plain.chosen.tolist()
    assert (more.verdict, more.value, more.proof, more.reason) == (
        plain.verdict, plain.value, plain.proof, plain.reason,
    )  # fmt: skip
    assert set(plain.columns) == {name for name in more.columns if not name.startswith("best_")}


def test_the_same_question_has_the_same_answer() -> None:
    one, other = (run(IndependentSet(best=50), *braced(16)) for _ in range(2))
    assert best_of(one) == best_of(other)


def test_a_kept_structure_changes_nothing() -> None:
    n, edges, weights = braced(16)
    graph, array, question = Graph.from_edges(n, edges), np.array(weights), IndependentSet(best=50, count=True)
    first = solve(question, graph, array, Budget(), "bound", Monitor())
    again = solve(question, graph, array, Budget(), "bound", Monitor(), first.kept)
    assert first.kept is not None
    assert again.kept is None
    assert best_of(first) == best_of(again)
    assert first.count == again.count


@pytest.mark.parametrize(
    ("asked", "note"),
    [
        ({"best": 900}, "the best sets: memory budget: 900 sets do not fit"),
        ({"count": True}, "count: memory budget: the sums and products of the best states do not fit"),
    ],
)
def test_what_does_not_fit_into_memory_is_said_so(asked: dict[str, int], note: str) -> None:
    """The optimum is proven all the same.  Nothing weighs anything, so that the best sets are past counting."""
    n, edges = 2000, [(v, v + 1) for v in range(1999)]
    outcome = run(IndependentSet(**asked), n, edges, [0] * n, memory=2**20 + 450_000)
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.reason.endswith(note)
    assert outcome.count is None
    assert "best_value" not in outcome.columns


@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
@pytest.mark.parametrize("asked", [{"best": 5}, {"count": True}])
def test_a_stop_after_the_sweep_is_heeded(asked: dict[str, int], stop: Stop, monkeypatch: pytest.MonkeyPatch) -> None:
    """SECONDS leaves the proven optimum without the add-on, CANCEL leaves nothing."""
    n, edges, weights = braced(30)
    monitor = Monitor()
    from nearchord_solve.questions import independent_set

    settle = independent_set.find_heaviest

    def settle_then_stop(task):  # type: ignore[no-untyped-def]
        found = settle(task)
        monitor.cells[Monitor.STOP] = stop
        return found

    monkeypatch.setattr(independent_set, "find_heaviest", settle_then_stop)
    outcome = solve(IndependentSet(**asked), Graph.from_edges(n, edges), np.array(weights), Budget(), "bound", monitor)
    assert outcome.count is None
    assert "best_value" not in outcome.columns
    if stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value, outcome.proof) == (Verdict.CANCELLED, None, "none")
        assert outcome.columns == {}
    else:
        assert outcome.verdict is Verdict.PROVEN
        assert "seconds ran out" in outcome.reason


def test_primes_that_divide_a_denominator_are_replaced(monkeypatch: pytest.MonkeyPatch) -> None:
    """With small primes most of them do; what is left gives the right count all the same."""
    used: list[int] = []

    def small_primes(top: int) -> Iterator[int]:
        for p in numbers(3, 2):
            if all(p % q for q in range(3, int(p**0.5) + 1, 2)):
                used.append(p)
                yield p

    monkeypatch.setattr(counting, "primes_below", small_primes)
    n, edges, _ = braced(40)
    outcome = run(IndependentSet(count=True), n, edges, [0] * n)
    monkeypatch.undo()
    assert outcome.count == run(IndependentSet(count=True), n, edges, [0] * n).count
    assert len(used) > 8


def test_primes_descend_from_the_top() -> None:
    """2^31 - 1 is a Mersenne prime; all below it are found by trial division."""
    primes = counting.primes_below(2**31)
    found = [next(primes) for _ in range(50)]
    assert found[0] == 2**31 - 1
    divisors = np.arange(2, 46341)
    expected = [p for p in range(2**31 - 1, found[-1] - 1, -1) if (p % divisors).all()]
    assert found == expected


def test_phases_of_a_solve_with_add_ons_stay_in_order() -> None:
    phases: list[Phase] = []
    n, edges, weights = braced(12)
    question = IndependentSet(best=3, count=True)
    solve(question, Graph.from_edges(n, edges), np.array(weights), Budget(), "bound", Monitor(None, phases.append))
    assert phases == sorted(phases)
