"""Readers: what is taken from each format, what is dropped with a notice, and the exact words for what is wrong."""

from __future__ import annotations

import gzip
import io
import json

import nearchord
import networkx
import pytest
from nearchord import Graph, files

DIMACS = "c two cleared pairs\np edge 4 3\nn 1 5\nn 4 2\ne 1 2\ne 3 2\ne 4 3\n"
SQUARE = Graph.from_edges(4, [(0, 1), (1, 2), (2, 3)], names="1234")


def read(text, name="g.col", **options):
    """Reads a text, or bytes, as an open file of a name."""
    file = io.BytesIO(text.encode() if isinstance(text, str) else text)
    file.name = name
    return files.read(file, **options)


def complaint(text, name="g.col", **options):
    """The words with which a text is refused."""
    with pytest.raises(nearchord.FileProblem) as caught:
        read(text, name, **options)
    return str(caught.value)


# --- DIMACS edge format


def test_dimacs_numbers_are_the_names():
    """Vertices from 1 in the file are from 0 in the graph and keep their numbers as names."""
    graph = read(DIMACS)
    assert graph == SQUARE.with_weights([5, 1, 1, 2])
    assert graph.notices == ()


@pytest.mark.parametrize(
    "text",
    [
        DIMACS.replace("\n", "\r\n"),
        DIMACS.rstrip("\n"),
        "\ufeff" + DIMACS,
        DIMACS.replace("\ne ", "\n  e\t").replace("\n", "  \n\n"),
        DIMACS.replace("edge", "col"),
        DIMACS.replace("e 3 2", "e 03 0000000000000002"),
        DIMACS + "c überall frei\n",
    ],
    ids=[
        "Windows line ends",
        "no last line feed",
        "byte order mark",
        "blanks",
        "col",
        "leading zeros",
        "UTF-8 comment",
    ],
)
def test_dimacs_is_taken_in_all_its_spellings(text):
    """Line ends, blanks and words vary; the graph does not."""
    assert read(text) == SQUARE.with_weights([5, 1, 1, 2])


def test_dimacs_without_weights_has_none():
    """Without `n` lines there are no weights at all."""
    assert read("p edge 4 3\ne 1 2\ne 2 3\ne 3 4\n") == SQUARE


@pytest.mark.parametrize("text", ["p edge 0 0\n", "p edge 0 0"])
def test_dimacs_takes_the_empty_graph(text):
    """No vertices, no edges, no last line feed."""
    assert (read(text).n, read(text).m) == (0, 0)


def test_dimacs_takes_isolated_vertices():
    """200,000 vertices without an edge."""
    assert read("p edge 200000 0\n").n == 200_000


@pytest.mark.parametrize("announced", [4, 3, 2])
def test_dimacs_edges_listed_twice_are_dropped_with_a_notice(announced):
    """Files announce their edges as listed, without self-loops, or without repetitions."""
    graph = read(f"p edge 3 {announced}\ne 1 2\ne 2 1\ne 2 3\ne 3 3\n")
    assert graph.m == 2
    assert graph.notices == ("g.col: 1 self-loop dropped", "g.col: 1 repeated edge dropped")


def test_more_than_one_is_counted():
    """Notices count."""
    graph = read("p edge 3 6\n" + "e 1 2\n" * 3 + "e 1 1\ne 2 2\ne 3 3\n")
    assert graph.notices == ("g.col: 3 self-loops dropped", "g.col: 2 repeated edges dropped")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "g.col: there is no line `p edge n m`; add it before the first edge"),
        ("e 1 2\n", "g.col: there is no line `p edge n m`; add it before the first edge"),
        ("e 1 2\np edge 2 1\n", "g.col, line 1: this line stands before the line `p`; move the line `p` to the top"),
        ("p edge 1 0\np edge 1 0\n", "g.col, line 2: a second line `p`; keep one"),
        ("p edge 3\n", "g.col, line 1: 'p edge 3' is no problem line; write `p edge n m` with two numbers"),
        ("p edge -1 0\n", "g.col, line 1: 'p edge -1 0' is no problem line; write `p edge n m` with two numbers"),
        ("p cnf 3 1\n", "g.col, line 1: 'p cnf 3 1' is no problem line; write `p edge n m` with two numbers"),
        ("p edge 4294967296 0\n", "g.col, line 1: 4294967296 vertices are too many; at most 4294967295 are possible"),
        (
            "p edge 2 1\nx 1 2\n",
            "g.col, line 2: the line begins with 'x'; lines begin with c, p, n or e; mark notes with c",
        ),
        (
            "p edge 2 1\n\x00e 1 2\n",
            "g.col, line 2: the line begins with '\\x00e'; lines begin with c, p, n or e; mark notes with c",
        ),
        (
            "p edge 2 2\n\ne 1 2\n",
            "g.col, line 1: 2 edges are announced, but 1 are listed (1 different ones); "
            "complete the file, or write `p edge 2 1`",
        ),
        ("p edge 3 1\ne 1 4\n", "g.col, line 2: vertex 4 does not exist; line 1 announces vertices 1 to 3"),
        ("p edge 3 1\ne 0 1\n", "g.col, line 2: vertex 0 does not exist; line 1 announces vertices 1 to 3"),
        ("p edge 3 1\ne -1 1\n", "g.col, line 2: vertex -1 does not exist; line 1 announces vertices 1 to 3"),
        ("p edge 0 1\ne 1 1\n", "g.col, line 2: vertex 1 does not exist; the graph has no vertices"),
        (
            "p edge 3 2\ne 1 2\ne 1\n",
            "g.col, line 3: 'e 1' is no edge; write `e u v` with two vertex numbers from 1",
        ),
        (
            "p edge 3 2\ne 1 2 3\ne 1\n",
            "g.col, line 2: 'e 1 2 3' is no edge; write `e u v` with two vertex numbers from 1",
        ),
        (
            "p edge 3 1\ne 1 two\n",
            "g.col, line 2: 'e 1 two' is no edge; write `e u v` with two vertex numbers from 1",
        ),
        ("p edge 3 1\ne1 2\n", "g.col, line 2: 'e1 2' is no edge; write `e u v` with two vertex numbers from 1"),
        ("p edge 3 1\ne 1 2.0\n", "g.col, line 2: 'e 1 2.0' is no edge; write `e u v` with two vertex numbers from 1"),
        ("p edge 3 0\nn 1\n", "g.col, line 2: 'n 1' is no weight; write `n v w`: vertex, weight"),
        ("p edge 3 0\nn 4 1\n", "g.col, line 2: vertex 4 does not exist; line 1 announces vertices 1 to 3"),
        ("p edge 3 0\nn 0 1\n", "g.col, line 2: vertex 0 does not exist; line 1 announces vertices 1 to 3"),
        ("p edge 3 0\nn 1 1\nn 1 2\n", "g.col, line 3: vertex 1 has a weight already; keep one line `n` a vertex"),
        ("p edge 3 0\nn 1 -4\n", "g.col, line 2: weight -4 is negative; give weights of at least 0"),
        ("p edge 3 0\nn 1 x\n", "g.col, line 2: weight 'x' is not a number; write a whole number of at least 0"),
        (
            "p edge 3 0\nn 1 3\nn 2 2.25\n",
            "g.col, line 3: weight 2.25 is not a whole number; "
            "multiply all weights: scale=100 (on the command line --scale 100)",
        ),
        (
            f"p edge 3 0\nn 1 {2**62}\n",
            f"g.col, line 2: weight {2**62} is 2^62 or more; count in a larger unit: divide all weights",
        ),
        (
            f"p edge 2 0\nn 1 {2**61}\nn 2 {2**61}\n",
            "g.col: the weights add up to 2^62 or more; count in a larger unit: divide all weights",
        ),
    ],
)
def test_dimacs_faults_are_named(text, message):
    """File, line, what is wrong and what to do."""
    assert complaint(text) == message


def test_scale_makes_decimals_whole():
    """All weights are multiplied, also those that were whole or not given; a notice says so."""
    graph = read("p edge 4 0\nn 1 2.25\nn 2 3\nn 3 1e-1\n", scale=100)
    assert graph.weights.tolist() == [225, 300, 10, 100]
    assert graph.notices == ("weights, and so values and bounds, are multiplied by 100",)


def test_scale_applies_to_plain_weights_too():
    """The fast path scales like the exact one, and what overflows is noticed."""
    assert read("p edge 2 0\nn 1 2\nn 2 3\n", scale=1000).weights.tolist() == [2000, 3000]
    assert "is 2^62 or more" in complaint("p edge 2 0\nn 1 9999999999\n", scale=10**10)


def test_a_scale_too_small_says_which_would_do():
    """The remedy is a power of ten."""
    assert complaint("p edge 1 0\nn 1 0.0625\n", scale=10) == (
        "g.col, line 2: weight 0.0625 times the scale 10 is not a whole number; "
        "multiply all weights: scale=10000 (on the command line --scale 10000)"
    )


@pytest.mark.parametrize("scale", [0, -1, 1.5, True])
def test_a_scale_is_a_whole_number(scale):
    """Anything else is refused before the file is read."""
    with pytest.raises(nearchord.BadInput, match="scale is"):
        read(DIMACS, scale=scale)


@pytest.mark.parametrize("weight", ["1e999999", "-1e999999", "1e-999999", "9" * 500, "nan", "inf", "１"])
def test_extreme_weights_are_refused_quickly(weight):
    """No number in a file makes the reader compute for ever, and only plain digits are numbers."""
    assert "g.col, line 2: weight" in complaint(f"p edge 1 0\nn 1 {weight}\n")


def test_blocks_of_lines_are_joined(monkeypatch):
    """Reading block by block gives what reading at once gives, with other lines between."""
    monkeypatch.setattr(files.dimacs.table, "BLOCK_LINES", 3)
    n = 50
    edges = "".join(f"e {i} {i + 1}\n" + ("c between\n" if i % 4 == 0 else "") for i in range(1, n))
    weights = "".join(f"n {i} {i * i}\n" for i in range(n, 0, -1))
    graph = read(f"p edge {n} {n - 1}\n{weights}{edges}")
    assert graph == Graph.from_edges(
        n,
        [(i, i + 1) for i in range(n - 1)],
        weights=[i * i for i in range(1, n + 1)],
        names=[str(i) for i in range(1, n + 1)],
    )


@pytest.mark.parametrize("name", ["g.col", "g.col.gz"])
def test_what_is_written_is_read_back(tmp_path, name):
    """Written DIMACS files, gzipped or not, give the same graph."""
    graph = SQUARE.with_weights([5, 0, 1, 2])
    files.write_dimacs(graph, tmp_path / name)
    assert Graph.read(tmp_path / name) == graph
    buffer = io.BytesIO()
    files.write_dimacs(SQUARE, buffer)
    assert read(buffer.getvalue()) == SQUARE


# --- documents


def test_gzip_is_recognised_by_content():
    """Whatever the name says."""
    assert read(gzip.compress(DIMACS.encode()), "g.col") == read(DIMACS)
    assert read(gzip.compress(DIMACS.encode()), "g.col.gz") == read(DIMACS)
    assert read(DIMACS, "g.col.gz") == read(DIMACS)


def test_a_stream_that_cannot_be_rewound_is_read():
    """Standard input is such a stream, also when it carries gzip."""

    class Pipe(io.RawIOBase):
        name = "<stdin>"

        def __init__(self, data):
            super().__init__()
            self.rest = data

        def readable(self):
            return True

        def read(self, size=-1):
            size = len(self.rest) if size < 0 else min(size, 7)
            taken, self.rest = self.rest[:size], self.rest[size:]
            return taken

    for data in (DIMACS.encode(), gzip.compress(DIMACS.encode())):
        assert files.read(Pipe(data)) == read(DIMACS)


def test_broken_gzip_is_named():
    """Cut or damaged gzip data is no shorter graph."""
    packed = gzip.compress(DIMACS.encode() * 50)
    assert complaint(packed[:-20]).startswith("g.col: the gzip data is broken (")
    assert complaint(packed[:-3] + b"abc").startswith("g.col: the gzip data is broken (")
    assert complaint(packed[:20] + b"\xff" * 20 + packed[40:]).startswith("g.col: the gzip data is broken (")


def test_a_gzip_bomb_meets_the_cap():
    """Unpacking stops at the cap, long before the memory is full."""
    bomb = gzip.compress(bytes(50_000_000))
    assert len(bomb) < 100_000
    message = complaint(bomb, limit_bytes=10_000_000)
    assert message.startswith("g.col: it has more than 10000000 bytes unpacked; raise limit_bytes")


def test_other_encodings_are_named_with_line_and_byte():
    """The place of the first byte that is not UTF-8."""
    assert complaint("c Zürich\np edge 0 0\n".encode("latin-1")) == (
        "g.col, line 1: byte 0xfc at position 3 is not UTF-8; save the file as UTF-8"
    )
    assert complaint(b"p edge 0 0\nc ok\nc \xff\n") == (
        "g.col, line 3: byte 0xff at position 18 is not UTF-8; save the file as UTF-8"
    )


def test_missing_files_and_folders_are_named(tmp_path):
    """Paths that cannot be read."""
    with pytest.raises(nearchord.FileProblem, match=r"none\.col: there is no such file; check the path"):
        Graph.read(tmp_path / "none.col")
    with pytest.raises(nearchord.FileProblem, match="this is a folder; name a file in it"):
        Graph.read(tmp_path)


def test_text_streams_are_refused():
    """The remedy is to open the file in binary mode."""
    with pytest.raises(nearchord.BadInput, match="open it in binary mode"):
        files.read(io.StringIO(DIMACS))


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("x", DIMACS),
        ("x", "\n\nsource,target\n1,2\n"),
        ("x.dat", '{"nodes": [], "links": []}'),
        ("x", '<?xml version="1.0"?><graphml><graph/></graphml>'),
        ("x.CSV", "source,target\n"),
        ("a.json", '{"nodes": [], "links": []}'),
        ("x.graphml", "<graphml><graph/></graphml>"),
        ("x.tsv", "source\ttarget\n"),
    ],
)
def test_the_format_is_told_by_name_or_content(name, text):
    """A suffix that is known decides, otherwise the first bytes do."""
    assert isinstance(read(text, name), Graph)


def test_an_untellable_format_is_named():
    """The remedy names the formats; a wrong one is refused."""
    assert complaint("hello\n", "x").startswith("x: neither name nor content tell its format; say format=")
    with pytest.raises(
        nearchord.BadInput, match="there is no format 'gml'; say one of csv, dimacs, graphml, node-link"
    ):
        read(DIMACS, format="gml")
    assert read(DIMACS, "x.csv", format="dimacs") == read(DIMACS)


# --- CSV edge list


def test_csv_names_are_numbered_as_they_appear():
    """Order of first appearance; a row without target declares a vertex; other columns are ignored with a notice."""
    graph = read('source,km,target\nb,1,a\n"c, d",2,b\ne,,\n', "g.csv")
    assert graph == Graph.from_edges(4, [(0, 1), (2, 0)], names=["b", "a", "c, d", "e"])
    assert graph.notices == ("g.csv: the columns km are ignored",)


@pytest.mark.parametrize(
    "text",
    [
        "Source;Target\r\na;b\r\n",
        "source\ttarget\na\tb\n",
        " source , target \n\n a , b \n\n",
        "\ufeffsource,target\na,b",
    ],
    ids=["semicolon", "tab", "blanks", "byte order mark"],
)
def test_csv_is_taken_in_all_its_spellings(text):
    """Separators, blanks and line ends vary; the graph does not."""
    assert read(text, "g.csv") == Graph.from_edges(2, [(0, 1)], names="ab")


def test_csv_drops_with_a_notice():
    """Self-loops and repetitions, in either direction."""
    graph = read("source,target\na,b\nb,a\na,a\n", "g.csv")
    assert graph.m == 1
    assert graph.notices == ("g.csv: 1 self-loop dropped", "g.csv: 1 repeated edge dropped")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (
            "",
            "g.csv, line 1: the header has 0 columns called 'source'; name each column once and one of them 'source'",
        ),
        (
            "a,b\n",
            "g.csv, line 1: the header has 0 columns called 'source'; name each column once and one of them 'source'",
        ),
        (
            "source,target,target\n",
            "g.csv, line 1: the header has 2 columns called 'target'; name each column once and one of them 'target'",
        ),
        (
            "source,target\na,b\nc\n",
            "g.csv, line 3: the row has 1 fields, the header 2; give every column a value, or quote it",
        ),
        ("source,target\na,b\n,c\n", "g.csv, line 3: '' is no name; name both ends, without control characters"),
        ("source,target\na,b\x07\n", "g.csv, line 2: 'b\\x07' is no name; name both ends, without control characters"),
        (
            'source,target\na,"b\n',
            "g.csv, line 2: the row cannot be parsed (unexpected end of data); close every quotation mark",
        ),
    ],
)
def test_csv_faults_are_named(text, message):
    """File, line, what is wrong and what to do."""
    assert complaint(text, "g.csv") == message


# --- GraphML


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


# --- node-link JSON


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


# --- weights in a file of their own


@pytest.mark.parametrize(
    "text",
    [
        "5\n0\n7\n2\n",
        "5\r\n\r\n0\r\n7\r\n2",
        "name,weight\n2,0\n1,5\n4,2\n3,7\n",
        "note;weight;name\n;7;3\n;5;1\n;2;4\n;0;2\n",
    ],
    ids=["numbers", "Windows line ends", "csv", "csv with other columns"],
)
def test_weights_come_from_a_file_of_their_own(text):
    """One number a line in the order of the vertices, or by name."""
    graph = read(DIMACS, weights=io.BytesIO(text.encode()))
    assert graph == SQUARE.with_weights([5, 0, 7, 2])


def test_weights_are_given_by_number_where_there_are_no_names():
    """The name of a vertex without name is its number from 0."""
    graph = files.read_weights(io.BytesIO(b"name,weight\n1,1.5\n0,2\n"), Graph.from_edges(2, []), scale=10)
    assert graph.weights.tolist() == [20, 15]
    assert graph.notices == ("weights, and so values and bounds, are multiplied by 10",)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("1\n2\n3\n", "w: there are 3 weights, but the graph has 4 vertices; give one a line and vertex"),
        ("1\n2\nx\n4\n", "w, line 3: weight 'x' is not a number; write a whole number of at least 0"),
        ("1\n2\n\n-3\n4\n", "w, line 4: weight -3 is negative; give weights of at least 0"),
        ("name,weight\n1,1\n", "w: vertex '2' has no weight; add a row for it: 2,1"),
        (
            "name,weight\n9,1\n",
            "w, line 2: '9' is no vertex of the graph; correct the name, or declare the vertex in the graph",
        ),
        ("name,weight\n1,1\n1,1\n", "w, line 3: '1' has a weight already; keep one row a vertex"),
        ("name,weight\n1,\n", "w, line 2: weight '' is not a number; write a whole number of at least 0"),
        (
            "name,value\n1,1\n",
            "w, line 1: the header has 0 columns called 'weight'; name each column once and one of them 'weight'",
        ),
        (
            f"{2**61}\n{2**61}\n1\n1\n",
            "w: the weights add up to 2^62 or more; count in a larger unit: divide all weights",
        ),
    ],
)
def test_weight_file_faults_are_named(text, message):
    """File, line, what is wrong and what to do."""
    file = io.BytesIO(text.encode())
    file.name = "w"
    assert complaint(DIMACS, weights=file) == message
