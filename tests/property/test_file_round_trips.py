"""Graphs survive every file format, whoever writes the file."""

from __future__ import annotations

import csv
import gzip
import io
import json

import nearchord
import networkx
import numpy as np
import strategies
from hypothesis import given, settings
from hypothesis import strategies as st
from nearchord import Graph, files

NAMES = st.text(st.characters(codec="utf-8", exclude_categories=("Cc", "Cs", "Zs", "Zl", "Zp")), min_size=1, max_size=6)


patient = settings(deadline=None)  # the machine may be busy


@st.composite
def named_graphs(draw):
    """A drawn graph with weights and names."""
    n, edges, weights = draw(strategies.weighted_graphs())
    names = draw(st.lists(NAMES.filter(str.isprintable), min_size=n, max_size=n, unique=True))
    return Graph.from_edges(n, edges, weights, names)


def opened(data, name):
    file = io.BytesIO(data)
    file.name = name
    return file


def as_graphml(graph):
    return "\n".join(networkx.generate_graphml(graph.to_networkx())).encode()


def as_node_link(graph):
    return json.dumps(networkx.node_link_data(graph.to_networkx(), edges="links")).encode()


def as_csv(graph):
    """Vertices first, so that their order stays; weights do not travel."""
    text = io.StringIO()
    writer = csv.writer(text)
    writer.writerow(["source", "target"])
    writer.writerows([name, ""] for name in graph.names)
    u, v = graph.edges()
    writer.writerows([graph.names[b], graph.names[a]] for a, b in zip(u.tolist(), v.tolist(), strict=True))
    return text.getvalue().encode()


def as_dimacs(graph):
    buffer = io.BytesIO()
    files.write_dimacs(graph, buffer)
    return buffer.getvalue()


def weightless(graph):
    """Without vertices there are no weights to write."""
    return graph if graph.n else graph.with_weights(None)


@patient
@given(named_graphs())
def test_graphml_and_node_link_json_keep_everything(graph):
    """What networkx writes of a graph is that graph: names, weights, edges."""
    assert files.read(opened(as_graphml(graph), "g.graphml")) == weightless(graph)
    assert files.read(opened(as_node_link(graph), "g.json")) == weightless(graph)


@patient
@given(named_graphs())
def test_csv_keeps_names_and_edges(graph):
    """The csv module quotes what has to be quoted; weights come from a file of their own."""
    read = files.read(opened(as_csv(graph), "g.csv"))
    assert read == graph.with_weights(None)
    weights = "\n".join(str(w) for w in graph.weights.tolist()).encode()
    assert files.read_weights(io.BytesIO(weights), read) == graph


@patient
@given(named_graphs(), st.booleans())
def test_dimacs_keeps_everything_but_names(graph, packed):
    """Written and read back, gzipped or not."""
    data = gzip.compress(as_dimacs(graph)) if packed else as_dimacs(graph)
    read = files.read(opened(data, "g.col"))
    assert read == weightless(graph).with_names([str(number) for number in range(1, graph.n + 1)])


@patient
@given(named_graphs(), st.randoms(use_true_random=False))
def test_the_fast_and_the_exact_path_agree_on_dimacs(graph, random):
    """Shuffled lines, repeated edges, comments between, and one line that only the exact path can read."""
    lines = as_dimacs(graph).decode().splitlines()
    body = lines[1:] + [f"c note {i}" for i in range(3)]
    random.shuffle(body)
    fast = files.read(opened("\n".join([lines[0], *body]).encode(), "g.col"))
    exact = files.read(opened("\n".join([lines[0], *(slow(line) for line in body)]).encode(), "g.col"))
    assert fast == exact == files.read(opened(as_dimacs(graph), "g.col"))


def slow(line):
    """The same line with more digits than the fast path takes."""
    kind, *numbers = line.split()
    return line if kind == "c" else " ".join([kind, *(number.zfill(17) for number in numbers)])


def complaint(data, name):
    """What the reader says; the name alone when it says nothing."""
    try:
        files.read(opened(data, name))
    except nearchord.FileProblem as problem:
        return str(problem)
    return name


@patient
@given(st.binary(max_size=60), st.sampled_from(["g.col", "g.csv", "g.json", "g.graphml", "g"]))
def test_no_bytes_break_a_reader(data, name):
    """Whatever the bytes: a graph, or a FileProblem that names the file."""
    assert complaint(data, name).startswith(name)


LINES = st.lists(st.text("pecn 0123456789-.\t", max_size=12), max_size=8)


@patient
@given(LINES)
def test_no_lines_break_the_dimacs_reader(lines):
    """Lines that look right: the fast path never takes what the exact path refuses."""
    data = "\n".join(["p edge 9 0", *lines]).encode()
    assert complaint(data, "g.col").startswith("g.col")


@patient
@given(strategies.graphs(), st.randoms(use_true_random=False))
def test_the_address_depends_on_the_graph_alone(drawn, random):
    """Edges in any order and direction give one address, and other edges another."""
    n, edges = drawn
    graph = Graph.from_edges(n, edges)
    turned = [pair if random.random() < 0.5 else pair[::-1] for pair in edges]
    random.shuffle(turned)
    assert Graph.from_edges(n, turned).address == graph.address
    if edges:
        assert Graph.from_edges(n, edges[1:]).address != graph.address


def test_the_atlas_survives_every_format():
    """All 1,253 graphs of networkx's atlas through every format, with seeded weights."""
    rng = np.random.default_rng(5)
    for source in networkx.graph_atlas_g():
        names = [f"v{node}" for node in source]
        graph = Graph.from_networkx(source).with_names(names).with_weights(rng.integers(0, 99, len(names)))
        assert files.read(opened(as_graphml(graph), "g.graphml")) == weightless(graph)
        assert files.read(opened(as_node_link(graph), "g.json")) == weightless(graph)
        assert files.read(opened(as_csv(graph), "g.csv")) == graph.with_weights(None)
        back = Graph.from_networkx(source).to_networkx()
        assert back.adj == networkx.relabel_nodes(source, str).adj
        dimacs = files.read(opened(as_dimacs(graph), "g.col"))
        assert (dimacs.address, dimacs.n) == (graph.address, graph.n)
