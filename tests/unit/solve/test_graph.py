"""Reading canonical rows: what is accepted, and how the first bad row is named."""

import numpy as np
import pytest
from nearchord_solve import Graph, GraphError, SolverError


def canonical(*rows: list[int]) -> tuple[np.ndarray, np.ndarray]:
    """Row pointers and targets of explicit rows."""
    ptr = np.zeros(len(rows) + 1, np.uint64)
    ptr[1:] = np.cumsum([len(row) for row in rows])
    return ptr, np.array([v for row in rows for v in row], np.uint32)


def test_rows_become_symmetric_and_ascending() -> None:
    graph = Graph.from_canonical(4, *canonical([1, 3], [2], [3], []))
    rows = [graph.adj[graph.ptr[v] : graph.ptr[v + 1]].tolist() for v in range(4)]
    assert rows == [[1, 3], [0, 2], [1, 3], [0, 2]]
    assert (graph.n, graph.m) == (4, 4)


@pytest.mark.parametrize(
    ("rows", "row", "message"),
    [
        (([1], [1], []), 1, "row 1: self-loop"),
        (([1, 1], [], []), 0, "row 0: target 1 is repeated"),
        (([2, 1], [], []), 0, "row 0: target 1 is out of order"),
        (([1], [0], []), 1, "row 1: target 0 is smaller; an edge belongs in the row of its smaller end"),
        (([1], [3], []), 1, "row 1: target 3 is out of range for 3 vertices"),
    ],
)
def test_first_bad_row_is_named(rows: tuple[list[int], ...], row: int, message: str) -> None:
    with pytest.raises(GraphError) as caught:
        Graph.from_canonical(3, *canonical(*rows))
    assert (caught.value.row, caught.value.message) == (row, message)


@pytest.mark.parametrize(("pointers", "row"), [([1, 1, 1], 0), ([0, 2, 1], 0), ([0, 1, 0], 1), ([0, 0, 0], 1)])
def test_bad_row_pointers_are_named(pointers: list[int], row: int) -> None:
    with pytest.raises(GraphError, match="row pointers must start at 0") as caught:
        Graph.from_canonical(2, np.array(pointers, np.uint64), np.array([1], np.uint32))
    assert caught.value.row == row


def test_row_pointers_beyond_int64_are_refused() -> None:
    with pytest.raises(GraphError, match="row 0"):
        Graph.from_canonical(1, np.array([0, 2**64 - 1], np.uint64), np.array([], np.uint32))


def test_wrong_number_of_row_pointers_is_refused() -> None:
    with pytest.raises(GraphError, match="expected 3 row pointers, got 2"):
        Graph.from_canonical(2, np.zeros(2, np.uint64), np.array([], np.uint32))


def test_wrong_element_type_is_refused() -> None:
    with pytest.raises(SolverError, match="expected an array of uint32, got int64"):
        Graph.from_canonical(1, np.zeros(2, np.uint64), np.array([], np.int64))


def test_unaligned_read_only_bytes_are_read() -> None:
    """Arrays cut out of received bytes may start at any address and cannot be written."""
    ptr, targets = canonical([1], [])
    raw = b"x" + ptr.tobytes() + targets.tobytes()
    rows = np.frombuffer(raw, np.uint64, 3, 1)
    assert not rows.flags.aligned
    graph = Graph.from_canonical(2, rows, np.frombuffer(raw, np.uint32, 1, 25))
    assert graph.adj.tolist() == [1, 0]


def test_graph_arrays_cannot_be_written() -> None:
    graph = Graph.from_edges(2, [(0, 1)])
    with pytest.raises(ValueError, match="read-only"):
        graph.adj[0] = 0


@pytest.mark.parametrize("pairs", [[(0, 0)], [(0, 1), (1, 0)], [(-1, 0)], [(0, 2)]])
def test_bad_pairs_are_refused(pairs: list[tuple[int, int]]) -> None:
    with pytest.raises(GraphError):
        Graph.from_edges(2, pairs)


@pytest.mark.parametrize("n", [0, 1, 5])
def test_graphs_without_edges_are_read(n: int) -> None:
    assert Graph.from_edges(n, []).m == 0
