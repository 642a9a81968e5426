"""CSV edge lists: what is taken, what is dropped with a notice, and the exact words for what is wrong."""

from __future__ import annotations

import pytest
from nearchord import Graph
from unit.client.reading import complaint, read


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
