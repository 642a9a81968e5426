"""The DIMACS edge format: what is taken, what is dropped with a notice, and the exact words for what is wrong."""

from __future__ import annotations

import io

import nearchord
import pytest
from nearchord import Graph, files
from unit.client.reading import DIMACS, SQUARE, complaint, read


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
