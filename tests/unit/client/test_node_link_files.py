"""Node-link JSON: what is taken, what is refused, and the exact words for what is wrong."""

from __future__ import annotations

import json

import networkx
import pytest
from nearchord import Graph
from unit.client.reading import complaint, read


@pytest.mark.parametrize("key", ["links", "edges"])
@pytest.mark.parametrize("weighted", [False, True])
def test_node_link_json_of_networkx_is_read(key, weighted):
    """Both names of the list of edges; ids of any kind become names."""
    source = networkx.Graph([(1, "x"), ("x", (2, 3))])
    source.add_node(2.5)
    if weighted:
        networkx.set_node_attributes(source, {1: 3, 2.5: 7}, "weight")
    text = json.dumps(networkx.node_link_data(source, edges=key))
    graph = read(text, "g.json")
    assert graph == Graph.from_networkx(source)
    assert graph.names == ("1", "x", "(2, 3)", "2.5")


def test_node_link_decimals_are_exact_under_a_scale():
    """Weights are read as decimals, not as binary fractions."""
    text = '{"nodes": [{"id": 0, "weight": 0.29}, {"id": 1, "weight": 1E1}, {"id": 2}], "links": []}'
    assert read(text, "g.json", scale=100).weights.tolist() == [29, 1000, 100]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('{"nodes": [\n}', "g.json, line 2: the JSON is broken (Expecting value); export the file again"),
        ("[]", 'g.json: the JSON is no object; write {"nodes": [...], "links": [...]}'),
        ('{"links": []}', 'g.json: there is no list \'nodes\'; write {"nodes": [...], "links": [...]}'),
        ('{"nodes": []}', 'g.json: there is no list \'links\'; write {"nodes": [...], "links": [...]}'),
        (
            '{"nodes": [], "links": [], "edges": []}',
            "g.json: there are both 'links' and 'edges'; keep one of the two lists",
        ),
        ('{"nodes": [{}], "links": []}', "g.json: nodes[0] has no 'id'; give it one: {\"id\": ...}"),
        ('{"nodes": [7], "links": []}', "g.json: nodes[0] has no 'id'; give it one: {\"id\": ...}"),
        (
            '{"nodes": [{"id": 1}, {"id": "1"}], "links": []}',
            "g.json: nodes[1] has the id of nodes[0]; give every node its own",
        ),
        (
            '{"nodes": [{"id": ""}], "links": []}',
            "g.json: nodes[0].id is ''; give non-empty text without control characters",
        ),
        (
            '{"nodes": [{"id": 1}], "links": [{"source": 1, "target": 2}]}',
            "g.json: links[0].target is '2', which is no node; add the node",
        ),
        (
            '{"nodes": [{"id": 1}], "edges": [{"source": 1}]}',
            "g.json: edges[0] has no 'target'; give it one: {\"target\": ...}",
        ),
        (
            '{"nodes": [{"id": 1, "weight": -1}], "links": []}',
            "g.json: nodes[0]: weight -1 is negative; give weights of at least 0",
        ),
        (
            '{"nodes": [{"id": 1, "weight": true}], "links": []}',
            "g.json: nodes[0]: weight 'True' is not a number; write a whole number of at least 0",
        ),
        (
            '{"nodes": [{"id": 1, "weight": NaN}], "links": []}',
            "g.json: the number NaN is not JSON; write finite numbers only",
        ),
    ],
)
def test_node_link_faults_are_named(text, message):
    """File, line or element, what is wrong and what to do."""
    assert complaint(text, "g.json") == message


@pytest.mark.parametrize("text", ["[" * 200_000, '{"nodes": ' + "9" * 5000 + "}"], ids=["deep", "long number"])
def test_hostile_json_is_refused_in_words(text):
    """Depth and length do not crash the reader."""
    assert complaint(text, "g.json").startswith("g.json: the JSON cannot be taken (")
