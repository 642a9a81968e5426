"""Questions colouring and fractional-colouring: against trial and linear programs, and within budgets."""

from collections.abc import Iterable
from fractions import Fraction
from itertools import combinations

import networkx as nx
import numpy as np
import pytest
from nearchord_solve import Budget, Graph, Monitor, SolverError, Stop, Verdict
from nearchord_solve.colouring import settle
from nearchord_solve.colouring.allotment import Allotment
from nearchord_solve.colouring.copies import Painter, copies
from nearchord_solve.colouring.evidence import Evidence
from nearchord_solve.colouring.parts import Parts
from nearchord_solve.colouring.planner import Planner
from nearchord_solve.questions import colouring, served
from nearchord_solve.structure import Structure
from nearchord_solve.tree import build_structure
from plans import fewest_units, judged, near, planned, shortest_length

RING = [(0, 1), (1, 2), (2, 3), (3, 4), (0, 4)]
BOTH = pytest.mark.parametrize("whole", [True, False])


def glued_wheels(count: int) -> tuple[int, list[tuple[int, int]]]:
    """Rings of five around a hub, each sharing the hub and one vertex of its ring with the one before."""
    edges = {(0, 1)}
    n = 2
    for _ in range(count):
        ring = [n - 1, *range(n, n + 4)]
        edges |= {(ring[i], ring[(i + 1) % 5]) for i in range(5)} | {(0, v) for v in ring}
        n += 4
    return n, sorted((min(pair), max(pair)) for pair in edges)


def test_every_atlas_graph_agrees_with_trial() -> None:
    """Graphs on up to seven vertices, with demands of one, and with small ones that vanish for some."""
    for number, atlas in enumerate(nx.graph_atlas_g()):
        n, edges = atlas.number_of_nodes(), sorted(atlas.edges)
        demands = [[1] * n, *([[(number + 3 * v) % 4 for v in range(n)]] if number % 6 == 0 else [])]
        for demand in demands:
            whole = planned(n, edges, demand)
            assert (whole.verdict, whole.value) == (Verdict.PROVEN, fewest_units(n, edges, demand)), number
            judged(n, edges, demand, whole)
            outcome = planned(n, edges, demand, whole=False)
            assert outcome.verdict is Verdict.PROVEN
            assert judged(n, edges, demand, outcome, whole=False).not_confirmed == ()
            assert outcome.value == whole.value or near(outcome.value, shortest_length(n, edges, demand)), number


@pytest.mark.parametrize("seed", range(30))
def test_random_graphs_agree_with_trial(seed: int) -> None:
    rng = np.random.default_rng(seed)
    n = int(rng.integers(8, 13))
    upper = np.triu(rng.random((n, n)) < rng.uniform(0.2, 0.8), 1)
    edges = [(int(u), int(v)) for u, v in zip(*np.nonzero(upper), strict=True)]
    demand = rng.integers(0, (2, 4)[seed % 2], n).tolist()
    outcome = planned(n, edges, demand)
    assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, fewest_units(n, edges, demand))
    judged(n, edges, demand, outcome)
    outcome = planned(n, edges, demand, whole=False)
    assert outcome.verdict is Verdict.PROVEN
    assert near(outcome.value, shortest_length(n, edges, demand))
    assert judged(n, edges, demand, outcome, whole=False).not_confirmed == ()


@BOTH
@pytest.mark.parametrize("demand", [None, [2, 1, 3, 2, 2] * 3 + [1] * 3])
def test_parts_are_put_together_along_cliques(whole: bool, demand: list[int] | None) -> None:
    """The frame of a chain is the longest of its parts; their plans agree on what they share."""
    n, edges = glued_wheels(4)
    outcome = planned(n, edges, demand, whole=whole)
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.fill_cores == 4
    judged(n, edges, demand, outcome, whole)
    if demand is None:
        assert outcome.value == (4 if whole else Fraction(7, 2))
        return
    parts = [[0, 1, 2, 3, 4, 5], [0, 5, 6, 7, 8, 9], [0, 9, 10, 11, 12, 13], [0, 13, 14, 15, 16, 17]]
    wheel = [(0, i) for i in range(1, 6)] + [(i, i + 1) for i in range(1, 5)] + [(1, 5)]
    wanted = [shortest_length(6, wheel, [demand[v] for v in part]) for part in parts]
    assert near(outcome.value, max(wanted)) or (whole and outcome.value == np.ceil(max(wanted) - 1e-9))


def test_a_part_may_need_one_more_than_its_bound_in_fractions() -> None:
    """The bound then rests on a search, and says so."""
    graph = nx.mycielski_graph(4)
    edges = sorted(graph.edges)
    outcome = planned(11, edges)
    assert (outcome.verdict, outcome.value, outcome.proof) == (Verdict.PROVEN, 4, "search")
    (left,) = judged(11, edges, None, outcome).not_confirmed
    assert "search" in left


@pytest.mark.parametrize("order", [range(9), [5, 6, 7, 8, 0, 1, 2, 3, 4]])
def test_a_frame_in_halves_is_widened_for_a_clique_that_was_overlooked(order: Iterable[int]) -> None:
    """A ring of five takes five halves, and the clique of four beside it eight, whichever comes first."""
    name = list(order)
    edges = [(name[u], name[v]) for u, v in [*RING, *combinations(range(5, 9), 2)]]
    graph = Graph.from_edges(9, edges)
    structure = build_structure(graph, Budget(), Monitor())
    assert isinstance(structure, Structure)
    demand, overlooked = np.ones(9, np.int64), np.array([name[0]])
    planner = Planner(graph, demand, Parts(graph, structure), overlooked, False, Budget(), Monitor())
    found = planner.run()
    assert (found.complete, found.allotment.frame, found.evidence.bound) == (True, 4, 4)
    assert found.evidence.clique is not None
    assert sorted(found.evidence.clique.tolist()) == sorted(name[5:])


def test_idle_time_in_a_frame_is_no_part_of_the_answer() -> None:
    graph = Graph.from_edges(2, [(0, 1)])
    allotment = Allotment(graph, np.arange(2, dtype=np.int32), np.ones(2, np.int64), np.zeros(16, np.int64))
    allotment.give(0, [(3, 4)])
    allotment.give(1, [(6, 7)])
    request = served.Request(graph, np.ones(2, np.int64), True, Budget(), "bound", Monitor(), None)
    found = served.Served(allotment, Evidence(Fraction(2), np.arange(2)), None, "")
    outcome = served.outcome_of_plan(request, found, lambda _: {})
    assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, 2)


def test_neighbours_keep_two_colours_whatever_is_asked() -> None:
    painter = Painter(copies(Graph.from_edges(2, [(0, 1)]), np.ones(2, np.int64)), Monitor())
    painter.begin()
    for target in (1, 0, -3):
        painter.improve(target, 10)
        assert (painter.colours, painter.plan.member.tolist()) == (2, [[True, False], [False, True]])


def test_a_search_that_gives_up_proves_nothing() -> None:
    """One step is not enough to refute two or three colours, so the clique stays the bound."""
    outcome = planned(11, sorted(nx.mycielski_graph(4).edges), budget=Budget(states=1))
    assert (outcome.verdict, outcome.bound) == (Verdict.BOUNDED, 2)
    assert outcome.value >= 4


@BOTH
@pytest.mark.parametrize(("n", "demand"), [(0, None), (1, None), (1, [0]), (3, [0, 0, 0]), (3, [4, 0, 2])])
def test_graphs_without_edges(whole: bool, n: int, demand: list[int] | None) -> None:
    outcome = planned(n, [], demand, whole=whole)
    assert outcome.verdict is Verdict.PROVEN
    assert outcome.value == max([1] * n if demand is None else demand, default=0)
    assert judged(n, [], demand, outcome, whole).not_confirmed == ()


def test_demands_need_a_list_of_colours_for_each_vertex() -> None:
    outcome = planned(5, RING, [2] * 5)
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.PROVEN, 5, 5)
    assert outcome.columns["colour_start"].tolist() == [0, 2, 4, 6, 8, 10]
    assert "colour_start" not in planned(5, RING).columns


def test_large_demands_are_served_exactly() -> None:
    """Numbers far beyond what floating-point numbers hold, still in whole steps."""
    demand = [10**17 + 1, 10**17, 10**17 + 3, 10**17 + 2, 10**17]
    outcome = planned(5, RING, demand, whole=False)
    assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, Fraction(sum(demand), 2))
    assert judged(5, RING, demand, outcome, whole=False).not_confirmed == ()


def test_steps_that_int64_cannot_hold_leave_a_gap() -> None:
    """Half a step cannot be written any more; the plan is longer by less than one step for each set."""
    demand = [2**59 + 1, 2**59, 2**59, 2**59, 2**59]
    outcome = planned(5, RING, [4 * (d // 4) + d % 4 for d in demand], whole=False)
    assert outcome.bound == Fraction(sum(demand), 2)
    assert 0 <= outcome.value - outcome.bound < 5
    judged(5, RING, demand, outcome, whole=False)


def test_too_many_colours_are_not_listed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(colouring, "MOST_COLOURS_GIVEN", 9)
    outcome = planned(5, RING, [2] * 5)
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.BOUNDED, None, 5)
    assert "fractional-colouring" in outcome.reason
    assert judged(5, RING, [2] * 5, outcome).not_confirmed == ("any plan: the answer carries none",)


def test_plans_of_many_pieces_are_rounded_where_there_is_room(monkeypatch: pytest.MonkeyPatch) -> None:
    """One tight clique keeps its demands; elsewhere boundaries fall on a grid, and nobody gets less."""
    rng = np.random.default_rng(3)
    n = 400
    edges = [(u, v) for v in range(n) for u in range(max(0, v - 4), v)]
    demand = rng.integers(1, 10**6, n).tolist()
    plain = planned(n, edges, demand, whole=False)
    monkeypatch.setattr(served, "MANY_ENTRIES", 1000)
    rounded = planned(n, edges, demand, whole=False)
    assert rounded.value == plain.value
    assert rounded.columns["share_vertex"].size < plain.columns["share_vertex"].size / 2
    assert judged(n, edges, demand, rounded, whole=False).not_confirmed == ()
    monkeypatch.setattr("nearchord_solve.questions.fractional_colouring.MOST_ENTRIES", 1000)
    refused = planned(n, edges, demand, whole=False)
    assert (refused.verdict, refused.value, refused.bound) == (Verdict.BOUNDED, None, plain.value)
    assert "coarser unit" in refused.reason


@pytest.mark.parametrize("seed", range(4))
def test_rounded_demands_fit_into_the_frame_of_the_exact_ones(seed: int) -> None:
    """Parts with fill included: what does not fit when raised keeps its demand."""
    rng = np.random.default_rng(seed)
    edges = [(u, v) for v in range(60) for u in range(max(0, v - 5), v) if rng.random() < 0.9]
    graph, demand = Graph.from_edges(60, edges), rng.integers(1, 10**6, 60)
    structure = build_structure(graph, Budget(), Monitor())
    assert isinstance(structure, Structure)
    assert structure.fill_cores
    parts = Parts(graph, structure)
    clique = max(nx.find_cliques(nx.Graph(edges)), key=lambda vertices: demand[vertices].sum())

    def length(needed: np.ndarray) -> Fraction:
        return Planner(graph, needed, parts, np.sort(clique), False, Budget(), Monitor()).run().allotment.frame

    frame = length(demand)
    raised = parts.raised(demand, int(frame))
    assert (raised >= demand).all()
    assert (raised > demand).any()
    assert length(raised) <= frame


@BOTH
def test_bad_demands_are_named(whole: bool) -> None:
    with pytest.raises(SolverError, match="vertex 2: weight -1 is negative"):
        planned(5, RING, [1, 1, -1, 1, 1], whole=whole)
    with pytest.raises(SolverError, match="less than"):
        planned(5, RING, [2**62, 0, 0, 0, 0], whole=whole)


@BOTH
def test_fractions_too_long_to_be_written_fall_back_on_a_grid(whole: bool, monkeypatch: pytest.MonkeyPatch) -> None:
    """The basis of the program may have a huge determinant; the bound does not suffer, and a plan is found."""
    monkeypatch.setattr("nearchord_solve.colouring.shortest.Master.exact_plan", lambda self: None)
    n, edges = glued_wheels(2)
    outcome = planned(n, edges, whole=whole)
    assert (outcome.verdict, outcome.value) == (Verdict.PROVEN, 4 if whole else Fraction(7, 2))
    judged(n, edges, None, outcome, whole)


def test_a_plan_that_serves_too_little_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    """Whatever solves the equations, its plan is compared with the demands."""
    monkeypatch.setattr(
        "nearchord_solve.colouring.shortest.solve_exactly", lambda matrix, right: ([1] * right.size, 10**6)
    )
    outcome = planned(5, RING, whole=False)
    assert outcome.bound <= Fraction(5, 2) <= outcome.value
    judged(5, RING, None, outcome, whole=False)


@BOTH
def test_without_exact_numbers_there_is_a_gap_and_a_valid_bound(whole: bool, monkeypatch: pytest.MonkeyPatch) -> None:
    """Bounds rest on whole-number sweeps under rounded multipliers, never on floating-point ones."""
    monkeypatch.setattr("nearchord_solve.colouring.shortest.solve_exactly", lambda matrix, right: None)
    monkeypatch.setattr(settle, "FINEST", 0)
    outcome = planned(5, RING, [1] * 5, whole=whole)
    assert outcome.bound <= (3 if whole else Fraction(5, 2)) <= outcome.value
    assert outcome.value - outcome.bound < Fraction(1, 10**6)
    judged(5, RING, [1] * 5, outcome, whole)


@BOTH
def test_a_small_budget_of_states_still_gives_a_plan(whole: bool) -> None:
    n, edges = glued_wheels(3)
    outcome = planned(n, edges, whole=whole, budget=Budget(states=1))
    assert outcome.bound <= (4 if whole else Fraction(7, 2)) <= outcome.value
    judged(n, edges, None, outcome, whole)


@BOTH
def test_memory_too_small_for_a_structure_still_gives_a_plan(whole: bool) -> None:
    n, edges = glued_wheels(3)
    outcome = planned(n, edges, whole=whole, budget=Budget(memory=1))
    assert outcome.verdict is Verdict.BOUNDED
    assert "memory budget" in outcome.reason
    assert outcome.fill is None
    judged(n, edges, None, outcome, whole)


@BOTH
def test_too_little_fill_is_told_where_the_job_stops_there(whole: bool) -> None:
    n, edges = glued_wheels(2)
    outcome = planned(n, edges, whole=whole, budget=Budget(fill=1), when_over="stop")
    assert (outcome.verdict, outcome.value, outcome.bound) == (Verdict.OVER_FILL, None, None)
    outcome = planned(n, edges, whole=whole, budget=Budget(fill=1))
    assert outcome.verdict is Verdict.PROVEN
    assert "more fill than the 1 budgeted" in outcome.reason


@BOTH
@pytest.mark.parametrize("stop", [Stop.SECONDS, Stop.CANCEL])
@pytest.mark.parametrize("phase", range(1, 6))
def test_a_stop_in_any_phase_ends_with_what_there_is(whole: bool, stop: Stop, phase: int) -> None:
    n, edges = glued_wheels(6)

    def heard(reached: int) -> None:
        if reached == phase:
            monitor.cells[Monitor.STOP] = stop

    monitor = Monitor(on_phase=heard)
    outcome = planned(n, edges, whole=whole, monitor=monitor)
    if monitor.stop is Stop.CANCEL:
        assert (outcome.verdict, outcome.value, outcome.chosen) == (Verdict.CANCELLED, None, None)
        return
    assert outcome.bound <= (4 if whole else Fraction(7, 2)) <= outcome.value
    judged(n, edges, None, outcome, whole)


@BOTH
def test_the_same_question_gets_the_same_answer(whole: bool) -> None:
    n, edges = glued_wheels(5)
    one, other = (planned(n, edges, whole=whole) for _ in range(2))
    assert one.columns.keys() == other.columns.keys()
    assert all(np.array_equal(one.columns[name], other.columns[name]) for name in one.columns)
