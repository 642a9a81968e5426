"""GraphML: what is taken, what is refused, and the exact words for what is wrong."""

from __future__ import annotations

import networkx
import pytest
from nearchord import Graph
from unit.client.reading import complaint, read


def graphml(body, keys=""):
    graph = f'{keys}<graph edgedefault="undirected">{body}</graph>'
    return f'<graphml xmlns="http://graphml.graphdrawing.org/xmlns">{graph}</graphml>'


WEIGHT_KEY = '<key id="d0" for="node" attr.name="weight" attr.type="double"/>'


@pytest.mark.parametrize("weighted", [False, True])
def test_graphml_of_networkx_is_read(tmp_path, weighted):
    """What networkx writes is what it held, with names, weights and isolated nodes."""
    source = networkx.Graph([("a b", "ß"), ("ß", "<&>")])
    source.add_node("alone")
    if weighted:
        networkx.set_node_attributes(source, {"a b": 3, "alone": 7}, "weight")
    networkx.write_graphml(source, tmp_path / "g.graphml")
    graph = Graph.read(tmp_path / "g.graphml")
    assert graph == Graph.from_networkx(source)
    assert graph.notices == ()


def test_graphml_defaults_of_the_weight_key_are_used():
    """Nodes without a weight take the default of the key."""
    key = '<key id="w" for="node" attr.name="weight" attr.type="int"><default>4</default></key>'
    body = '<node id="a"><data key="w">9</data></node><node id="b"/>'
    assert read(graphml(body, key), "g.graphml").weights.tolist() == [9, 4]
    assert read(graphml('<node id="b"/>', key), "g.graphml").weights.tolist() == [4]


def test_graphml_edges_may_stand_before_their_nodes():
    """The order of elements is free."""
    body = '<edge source="a" target="b"/><node id="a"/><node id="b"/>'
    assert read(graphml(body), "g.graphml") == Graph.from_edges(2, [(0, 1)], names="ab")


def test_graphml_directions_are_ignored_with_a_notice():
    """Both directions of an edge are one conflict."""
    body = '<node id="a"/><node id="b"/><edge source="a" target="b"/><edge source="b" target="a"/>'
    graph = read(graphml(body).replace("undirected", "directed"), "g.graphml")
    assert graph.notices == ("g.graphml: the directions of the edges are ignored", "g.graphml: 1 repeated edge dropped")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("<graphml>\n<graph>", "g.graphml, line 2: the XML is broken (no element found); export the file again"),
        ("<graphml/>", "g.graphml: there is no <graph> element; check that this is a GraphML file"),
        (
            graphml('<node id="a"/>\n<edge source="a" target="b"/>'),
            "g.graphml, line 2: the edge names 'b', which is no node; add the node",
        ),
        (
            graphml('\n<node id="a"/><node id="a"/>'),
            "g.graphml, line 2: the node 'a' stands there twice; give every node its own id",
        ),
        (
            graphml("<node/>"),
            "g.graphml, line 1: the node id '' is no name; give every node an id without control characters",
        ),
        (graphml('<edge source="a"/>'), "g.graphml, line 1: the edge lacks a source or a target; give both"),
        (graphml("<hyperedge/>"), "g.graphml, line 1: there is a hyperedge; write plain nodes and edges only"),
        (graphml('<node id="a"><graph/></node>'), "g.graphml, line 1: there is a second graph; keep one graph a file"),
        (
            graphml('<node id="a"><data key="d0">-1</data></node>', WEIGHT_KEY),
            "g.graphml, line 1: weight -1 is negative; give weights of at least 0",
        ),
        (
            graphml('<node id="a"><data key="d0">1.5</data></node>', WEIGHT_KEY),
            "g.graphml, line 1: weight 1.5 is not a whole number; "
            "multiply all weights: scale=10 (on the command line --scale 10)",
        ),
    ],
)
def test_graphml_faults_are_named(text, message):
    """File, line, what is wrong and what to do."""
    assert complaint(text, "g.graphml") == message


@pytest.mark.parametrize(
    "declaration",
    [
        '<!DOCTYPE graphml [<!ENTITY x SYSTEM "file:///etc/hostname">]>',
        '<!DOCTYPE graphml [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;">]>',
        '<!DOCTYPE graphml SYSTEM "http://127.0.0.1:1/x.dtd">',
    ],
    ids=["external entity", "growing entity", "external subset"],
)
def test_graphml_takes_no_entities(declaration):
    """A document type is refused before anything in it is looked at."""
    message = complaint(declaration + graphml('<node id="&x;"/>'), "g.graphml")
    assert message.startswith("g.graphml, line 1: the document declares a document type; remove")
