"""Reading texts as if they were files, for the tests of the readers."""

from __future__ import annotations

import io

import nearchord
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
