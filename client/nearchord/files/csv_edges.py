"""CSV edge list: a header with the columns `source` and `target`, then one edge a row.

A row with an empty target declares a vertex that may have no edge. The values are the names of the vertices, numbered
in the order of their first appearance; other columns are ignored with a notice. Comma, semicolon or tab separate.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator

from nearchord.errors import FileProblem
from nearchord.files import assemble
from nearchord.files.document import Document
from nearchord.graph import Graph

SEPARATORS = ",;\t"


class Rows:
    """The rows of a CSV document below its header; `line` is that of the row given last."""

    def __init__(self, document: Document) -> None:
        text = document.data.decode()
        first = next((line for line in text.splitlines() if line.strip()), "")
        self.separator = max(SEPARATORS, key=first.count)
        self._document = document
        self._reader = csv.reader(io.StringIO(text, newline=""), delimiter=self.separator, strict=True)
        self.header_as_written = [word.strip() for word in next(self._rows(), [])]
        self.header = [word.lower() for word in self.header_as_written]

    @property
    def line(self) -> int:
        """Line in the file of the row given last."""
        return self._reader.line_num

    def column(self, name: str) -> int:
        """Where a column stands; FileProblem when the header has not exactly one of this name."""
        if self.header.count(name) != 1:
            raise self._document.problem(
                max(1, self.line),
                f"the header has {self.header.count(name)} columns called {name!r}",
                f"name each column once and one of them {name!r}",
            )
        return self.header.index(name)

    def __iter__(self) -> Iterator[list[str]]:
        """Rows that are not blank and have as many fields as the header."""
        width = len(self.header)
        for row in self._rows():
            if len(row) != width:
                raise self._document.problem(
                    self.line,
                    f"the row has {len(row)} fields, the header {width}",
                    "give every column a value, or quote it",
                )
            yield row

    def _rows(self) -> Iterator[list[str]]:
        try:
            yield from (row for row in self._reader if any(row))
        except csv.Error as wrong:
            raise self.problem(f"the row cannot be parsed ({wrong})", "close every quotation mark") from None

    def problem(self, problem: str, remedy: str) -> FileProblem:
        """What is wrong in the row given last."""
        return self._document.problem(self.line, problem, remedy)


def read(document: Document, scale: int) -> Graph:
    """The graph of a document; FileProblem names the line that is wrong. Time O(bytes + m log m)."""
    rows = Rows(document)
    source, target = rows.column("source"), rows.column("target")
    numbers: dict[str, int] = {}
    ends: list[int] = []
    for row in rows:
        u, v = row[source].strip(), row[target].strip()
        if not (u and u.isprintable() and (not v or v.isprintable())):
            raise rows.problem(
                f"{u if v.isprintable() else v!r} is no name", "name both ends, without control characters"
            )
        first = numbers.setdefault(u, len(numbers))
        if v:
            ends += (first, numbers.setdefault(v, len(numbers)))
    ignored = [name for place, name in enumerate(rows.header) if place not in (source, target)]
    notices = [f"the columns {', '.join(ignored)} are ignored"] if ignored else []
    edges = assemble.distinct_edges(*assemble.columns(ends))
    return assemble.build(document, len(numbers), edges, None, list(numbers), notices)
