"""Weights in a file of their own: by place, by name, and the exact words for what is wrong."""

from __future__ import annotations

import io

import pytest
from nearchord import FileProblem, Graph, files
from unit.client.reading import DIMACS, SQUARE, complaint, read


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


SCENARIOS = "request;Dry;wet\n3;4;40\n1;2;20\n2;3;30\n4;5;50\n"


def test_scenarios_come_with_their_titles_from_a_table():
    """Rows in any order, titles as written."""
    titles, rows = files.read_scenarios(io.BytesIO(SCENARIOS.encode()), read(DIMACS))
    assert titles == ("Dry", "wet")
    assert rows.tolist() == [[2, 3, 4, 5], [20, 30, 40, 50]]
    _, rows = files.read_scenarios(io.BytesIO(b"name,a\n0,1.5\n"), Graph.from_edges(1, []), scale=10)
    assert rows.tolist() == [[15]]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "w, line 1: the header has no scenario; give a column of names, then one column a scenario"),
        ("name\n1\n", "w, line 1: the header has no scenario"),
        ("name,a,a\n1,1,1\n", "w, line 1: the header does not give every scenario a title of its own"),
        ("name,a,\n1,1,1\n", "w, line 1: the header does not give every scenario a title of its own"),
        ("name,a,b\n1,1\n", "w, line 2: the row has 2 fields, the header 3"),
        ("name,a,b\n1,1,x\n", "w, line 2: weight 'x' is not a number"),
        ("name,a,b\n9,1,1\n", "w, line 2: '9' is no vertex of the graph"),
        ("name,a,b\n1,1,1\n1,1,1\n", "w, line 3: '1' has a weight already; keep one row a vertex"),
        ("name,a,b\n1,1,1\n", "w: vertex '2' has no weight; add a row for it: 2,1,1"),
    ],
)
def test_faults_in_tables_of_scenarios_are_named(text, message):
    """File, line, what is wrong and what to do."""
    file = io.BytesIO(text.encode())
    file.name = "w"
    with pytest.raises(FileProblem) as caught:
        files.read_scenarios(file, read(DIMACS))
    assert message in str(caught.value)
