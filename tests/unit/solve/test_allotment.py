"""Time given to vertices: first fit, taking back, and frames without idle time."""

import numpy as np
from nearchord_solve import Graph
from nearchord_solve.colouring.allotment import DONE, OVER, PLANNED, Allotment
from nearchord_solve.colouring.plan import Mapping, Plan

PATH = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3)])


def allotment(demand: list[int], limit: int = 2**62) -> Allotment:
    return Allotment(PATH, np.arange(4, dtype=np.int32), np.array(demand, np.int64), np.zeros(16, np.int64), limit)


def test_each_vertex_takes_the_lowest_time_that_its_neighbours_leave() -> None:
    given = allotment([2, 3, 4, 1])
    assert given.advance() == (DONE, -1)
    assert [given.of(v) for v in range(4)] == [[(0, 2)], [(2, 5)], [(0, 2), (5, 7)], [(2, 3)]]
    assert given.length == 7


def test_it_stops_before_the_limit_is_passed_and_goes_on_when_it_is_raised() -> None:
    given = allotment([2, 3, 4, 1], 6)
    assert given.advance() == (OVER, 2)
    given.limit = 7
    assert given.advance() == (DONE, -1)


def test_what_is_planned_by_hand_can_be_taken_back_with_all_after_it() -> None:
    given = allotment([1, 1, 1, 1])
    given.planned[1] = 1
    assert given.advance() == (PLANNED, 1)
    given.give(1, [(5, 6)])
    assert given.advance() == (DONE, -1)
    given.undo(np.array([1]))
    assert [given.given(v) for v in range(4)] == [True, False, False, False]
    given.give(1, [(3, 4)])
    given.advance()
    assert given.of(2) == [(0, 1)]


def test_time_that_serves_nobody_is_taken_out() -> None:
    given = allotment([1, 2, 1, 1])
    given.planned[1] = 1
    given.advance()
    given.give(1, [(4, 5), (9, 10)])
    given.advance()
    given.close_gaps()
    assert [given.of(v) for v in range(4)] == [[(0, 1)], [(2, 3), (3, 4)], [(0, 1)], [(1, 2)]]
    assert given.length == 4


def test_a_finer_unit_changes_no_length() -> None:
    given = allotment([2, 3, 4, 1], 7)
    given.advance()
    given.refine(6)
    assert (given.unit, given.limit, given.length, given.frame) == (6, 42, 42, 7)
    given.undo(np.array([0]))
    given.advance()
    assert (given.length, given.frame) == (42, 7)


def test_a_plan_moves_to_where_the_vertices_above_are_served() -> None:
    """The vertex above is served first here and last there; the one that is served beside it moves along."""
    plan = Plan(np.array([[1, 1, 0], [0, 0, 1]], bool), [2, 3])
    times = plan.times([2, 1, 3], 1)
    mapping = Mapping([(times[0], [(3, 4), (6, 7)])], 5, 7)
    assert mapping.moved(times[1]) == [(3, 4)]
    assert mapping.moved(times[2]) == [(0, 3)]
