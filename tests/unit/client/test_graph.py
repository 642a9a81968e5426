"""Graphs: canonical form, what is refused, networkx."""

from __future__ import annotations

import hashlib
import struct

import nearchord
import networkx
import numpy as np
import pytest
from nearchord import Graph
from nearchord.session.content import content_of


def test_canonical_form_is_the_one_of_the_contract():
    """n, m, row pointers, targets: written here byte by byte, and hashed."""
    graph = Graph.from_edges(4, [(2, 1), (0, 3), (1, 0)])
    expected = struct.pack("<IQ5Q3I", 4, 3, 0, 2, 3, 3, 3, 1, 3, 2)
    assert b"".join(graph.canonical()) == expected
    assert graph.address == hashlib.sha256(expected).hexdigest()


@pytest.mark.parametrize("n", [0, 1, 200_000])
def test_graphs_without_edges_are_graphs(n):
    """No vertex, one vertex, many isolated ones."""
    graph = Graph.from_edges(n, [])
    assert (graph.n, graph.m, len(graph.row_ptr)) == (n, 0, n + 1)
    assert b"".join(graph.canonical()) == struct.pack("<IQ", n, 0) + bytes(8 * (n + 1))


def test_order_and_direction_of_edges_do_not_matter():
    """Shuffled and turned edges give the same bytes."""
    rng = np.random.default_rng(7)
    u, v = np.triu_indices(40, 1)
    order = rng.permutation(len(u))
    turn = rng.integers(0, 2, len(u)).astype(bool)
    a, b = np.where(turn, v, u)[order], np.where(turn, u, v)[order]
    assert Graph.from_arrays(40, a, b) == Graph.from_arrays(40, u, v)
    assert Graph.from_arrays(40, a, b).address == Graph.from_arrays(40, u, v).address


def test_edges_come_back_as_given_ascending():
    """`edges` lists both ends, the smaller first."""
    u, v = Graph.from_edges(5, [(4, 0), (3, 1), (0, 2)]).edges()
    assert list(zip(u.tolist(), v.tolist(), strict=True)) == [(0, 2), (0, 4), (1, 3)]


@pytest.mark.parametrize("dtype", [np.int8, np.uint8, np.int32, np.uint32, np.int64, np.uint64])
def test_every_integer_dtype_is_taken(dtype):
    """The canonical form does not depend on how endpoints are held."""
    graph = Graph.from_arrays(3, np.array([0, 1], dtype), np.array([1, 2], dtype))
    assert graph == Graph.from_edges(3, [(0, 1), (1, 2)])


def test_the_address_is_computed_once_for_all_weights_and_names(monkeypatch):
    """Weights and names are no part of what is addressed; neither does a session hash the graph again."""
    graph = Graph.from_edges(2, [(0, 1)])
    address = graph.address
    monkeypatch.setattr(hashlib, "sha256", None)
    other = graph.with_weights([1, 2]).with_names(["a", "b"]).with_weights(None)
    assert other.address == address == content_of(other).graph.address


def test_nothing_of_a_graph_can_be_changed():
    """Arrays are read-only, also those of the caller are not held on to; fields are frozen."""
    weights = np.array([1, 2])
    graph = Graph.from_edges(2, [(0, 1)], weights=weights)
    weights[0] = 9
    assert graph.weights.tolist() == [1, 2]
    for array in (graph.row_ptr, graph.targets, graph.weights):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 5
    with pytest.raises(AttributeError):
        graph.n = 3


@pytest.mark.parametrize(
    ("n", "edges", "message"),
    [
        (3, [(0, 1), (2, 2)], "edge 1 (2, 2) is a self-loop; leave it out: no vertex excludes itself"),
        (3, [(0, 1), (1, 2), (1, 0)], "edge 2 (0, 1) repeats edge 0; give each edge once, in either direction"),
        (
            3,
            [(0, 1), (1, 2), (2, 1), (0, 1)],
            "edge 2 (1, 2) repeats edge 1; give each edge once, in either direction",
        ),
        (3, [(0, 3)], "edge 0 (0, 3) leaves the range; the graph has vertices 0 to 2: correct the edge or raise n"),
        (3, [(-1, 0)], "edge 0 (-1, 0) leaves the range; the graph has vertices 0 to 2: correct the edge or raise n"),
        (0, [(0, 1)], "edge 0 (0, 1) leaves the range; the graph has no vertices: raise n"),
        (3, [(0, 1, 2)], "edges have the shape (1, 3); give pairs of vertex numbers, such as [(0, 1), (1, 2)]"),
        (
            3,
            [(0, 1), (1, 2, 0)],
            "edge 1 ((1, 2, 0)) is no pair; give pairs of vertex numbers, such as [(0, 1), (1, 2)]",
        ),
        (-1, [], "n = -1 is not a number of vertices; give a whole number from 0 to 4294967295"),
        (2.0, [], "n = 2.0 is not a number of vertices; give a whole number from 0 to 4294967295"),
        (2**32, [], "n = 4294967296 is not a number of vertices; give a whole number from 0 to 4294967295"),
    ],
)
def test_wrong_edges_are_refused_by_name(n, edges, message):
    """The first offending edge, its place and the remedy are named; the error is a ValueError too."""
    with pytest.raises(nearchord.BadInput) as caught:
        Graph.from_edges(n, edges)
    assert str(caught.value) == message
    assert isinstance(caught.value, ValueError)


@pytest.mark.parametrize("edges", [[(0.0, 1.0)], [("a", "b")], [(0, 2**63)], [(True, False)]])
def test_endpoints_are_vertex_numbers(edges):
    """Floats, words, numbers beyond 64 bits and truth values are no vertices."""
    with pytest.raises(nearchord.BadInput, match=r"vertex numbers|out of range"):
        Graph.from_edges(2, edges)


def test_columns_of_different_lengths_are_refused():
    """Nothing is cut silently."""
    with pytest.raises(nearchord.BadInput, match="u has 2 entries and v has 1"):
        Graph.from_arrays(3, [0, 1], [1])


@pytest.mark.parametrize(
    ("weights", "message"),
    [
        ([1, -2], "weight 1 is -2, which is negative; give weights of at least 0"),
        ([2**61, 2**61], "the weights add up to 2^62 or more; count in a larger unit: divide all weights"),
        ([0, 2**70], f"weight 1 is {2**70}, which is 2^62 or more; count in a larger unit: divide all weights"),
        (
            [1, 1.5],
            "weight 1 is 1.5, which is not a whole number; "
            "multiply all weights by a power of ten that makes them whole",
        ),
        ([1], "weights have shape (1,), but the graph has 2 vertices; give 2 weights"),
        (["1", "2"], "weights have dtype <U1; give whole numbers"),
    ],
)
def test_wrong_weights_are_refused_by_name(weights, message):
    """The first offending weight and the remedy are named."""
    with pytest.raises(nearchord.BadInput) as caught:
        Graph.from_edges(2, [], weights=weights)
    assert str(caught.value) == message


@pytest.mark.parametrize("weights", [[2**62 - 1, 0], [3.0, 4.0], np.array([1, 2], np.uint64), (w for w in (1, 2))])
def test_whole_weights_below_the_limit_are_taken(weights):
    """The largest sum, whole floats, unsigned arrays, generators."""
    assert Graph.from_edges(2, [], weights=weights).weights.dtype == np.int64


def test_the_sum_of_weights_is_exact():
    """A sum that would overflow 64 bits is noticed, not wrapped."""
    with pytest.raises(nearchord.BadInput, match=r"add up to 2\^62"):
        Graph.from_edges(5, [], weights=[2**62 - 1] * 5)


@pytest.mark.parametrize(
    ("names", "message"),
    [
        (["a"], "1 names were given for 2 vertices; give 2 names"),
        (["a", "a"], "name 1 ('a') is the name of vertex 0 too; give every vertex its own"),
        (["a", ""], "name 1 is ''; give non-empty text without control characters"),
        (["a", "b\n"], "name 1 is 'b\\n'; give non-empty text without control characters"),
        (["a", 2], "name 1 is 2; give non-empty text without control characters"),
    ],
)
def test_wrong_names_are_refused(names, message):
    """Names are different words that fit in a line."""
    with pytest.raises(nearchord.BadInput) as caught:
        Graph.from_edges(2, [], names=names)
    assert str(caught.value) == message


def test_equality_looks_at_everything_but_notices():
    """Weights and names count, how a file was read does not."""
    plain = Graph.from_edges(2, [(0, 1)])
    assert plain == Graph.from_edges(2, [(1, 0)])
    assert hash(plain) == hash(Graph.from_edges(2, [(1, 0)]))
    assert plain != plain.with_weights([1, 1])
    assert plain.with_weights([1, 1]) != plain.with_weights([1, 2])
    assert plain != plain.with_names(["a", "b"])
    assert plain.with_weights([1, 2]).with_weights(None) == plain
    assert plain != Graph.from_edges(2, [])


def test_networkx_nodes_become_names_and_back():
    """Labels, weights and isolated nodes survive both ways."""
    source = networkx.Graph()
    source.add_node("west", weight=5)
    source.add_node("east")
    source.add_edge("east", ("a", 1))
    graph = Graph.from_networkx(source)
    assert graph.names == ("west", "east", "('a', 1)")
    assert graph.weights.tolist() == [5, 1, 1]
    back = graph.to_networkx()
    assert dict(back.nodes(data="weight")) == {"west": 5, "east": 1, "('a', 1)": 1}
    assert Graph.from_networkx(back) == graph
    assert Graph.from_networkx(source, weight=None).weights is None


def test_graphs_without_names_become_numbers():
    """Vertices are the nodes of networkx, from 0."""
    back = Graph.from_edges(3, [(0, 2)]).to_networkx()
    assert list(back.nodes) == [0, 1, 2]
    assert list(back.edges) == [(0, 2)]


@pytest.mark.parametrize(
    ("source", "message"),
    [
        (networkx.Graph([("a", "a")]), r"the edge \('a', 'a'\) is a self-loop"),
        (networkx.MultiGraph([("a", "b"), ("b", "a")]), r"the edge \('[ab]', '[ab]'\) is repeated"),
        (networkx.DiGraph([("a", "b"), ("b", "a")]), r"the edge \('b', 'a'\) is repeated"),
        (networkx.Graph([(1, "1")]), "name 1 .* is the name of vertex 0 too"),
    ],
)
def test_networkx_graphs_that_are_not_simple_are_refused(source, message):
    """The message speaks of the caller's nodes."""
    with pytest.raises(nearchord.BadInput, match=message):
        Graph.from_networkx(source)


def test_labels_are_names_or_numbers():
    """`label` and `vertex` translate between numbers and names."""
    graph = Graph.from_edges(2, [], names=["x", "y"])
    assert (graph.label(1), graph.vertex("y")) == ("y", 1)
    assert Graph.from_edges(2, []).label(1) == "1"
    with pytest.raises(KeyError):
        graph.vertex("z")


def test_repr_is_short():
    """A graph of any size prints in one line."""
    assert repr(Graph.from_edges(2, [(0, 1)], weights=[1, 1], names="ab")) == "<Graph n=2 m=1 with weights and names>"
    assert repr(Graph.from_edges(2, [])) == "<Graph n=2 m=0>"
