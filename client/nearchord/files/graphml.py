"""GraphML: one graph of plain nodes and edges; node ids are the names, the node attribute `weight` the weights.

The parser takes no document type, hence no entities, neither external nor growing ones.
"""

from __future__ import annotations

from typing import NoReturn
from xml.parsers import expat

from nearchord.errors import BadInput
from nearchord.files import assemble
from nearchord.files.document import Document
from nearchord.files.number import weight_from
from nearchord.graph import Graph

NAMESPACE = "http://graphml.graphdrawing.org/xmlns"
UNSUPPORTED = {"hyperedge": "a hyperedge", "port": "a port"}


def read(document: Document, scale: int) -> Graph:
    """The graph of a document; FileProblem names the line that is wrong. Time O(bytes + m log m)."""
    reader = _Reader(document, scale)
    reader.parse()
    edges = assemble.distinct_edges(*assemble.columns(reader.numbered_ends()))
    n = len(reader.numbers)
    default = scale if reader.default is None else reader.default
    given = reader.weights
    if reader.default is not None and not given and n:
        given = {0: default}
    weights = assemble.spread(given, n, default)
    notices = ["the directions of the edges are ignored"] if reader.directed and len(edges.keys) else []
    return assemble.build(document, n, edges, weights, list(reader.numbers), notices)


class _Reader:
    """Collects nodes, edges and weights while expat walks through the document."""

    def __init__(self, document: Document, scale: int) -> None:
        self._document, self._scale = document, scale
        self.numbers: dict[str, int] = {}
        self.weights: dict[int, int] = {}
        self.default: int | None = None
        self.directed = False
        self._ends: list[tuple[str, str, int]] = []
        self._key: str | None = None
        self._graphs = 0
        self._path: list[str] = []
        self._node: int | None = None
        self._text: list[str] | None = None

    def parse(self) -> None:
        """Walks through the document."""
        self._parser = expat.ParserCreate(namespace_separator=" ")
        self._parser.buffer_text = True
        self._parser.StartDoctypeDeclHandler = self._refuse_doctype
        self._parser.StartElementHandler = self._start
        self._parser.EndElementHandler = self._end
        self._parser.CharacterDataHandler = self._characters
        try:
            self._parser.Parse(self._document.data, True)
        except expat.ExpatError as wrong:
            what = expat.ErrorString(wrong.code)
            raise self._document.problem(wrong.lineno, f"the XML is broken ({what})", "export the file again") from None
        if not self._graphs:
            raise self._document.problem(None, "there is no <graph> element", "check that this is a GraphML file")

    def numbered_ends(self) -> list[int]:
        """Endpoints as numbers, alternately; nodes may stand after their edges."""
        ends: list[int] = []
        for source, target, line in self._ends:
            for name in (source, target):
                if name not in self.numbers:
                    raise self._document.problem(line, f"the edge names {name!r}, which is no node", "add the node")
            ends += (self.numbers[source], self.numbers[target])
        return ends

    def _fail(self, problem: str, remedy: str) -> NoReturn:
        raise self._document.problem(self._parser.CurrentLineNumber, problem, remedy)

    def _refuse_doctype(self, *_: object) -> None:
        self._fail("the document declares a document type", "remove the <!DOCTYPE ...> declaration")

    def _start(self, tag: str, attributes: dict[str, str]) -> None:
        word = tag.removeprefix(f"{NAMESPACE} ")
        self._path.append(word)
        if word in UNSUPPORTED:
            self._fail(f"there is {UNSUPPORTED[word]}", "write plain nodes and edges only")
        handler = {
            "key": self._start_key,
            "graph": self._start_graph,
            "node": self._start_node,
            "edge": self._start_edge,
            "data": self._start_data,
            "default": self._start_default,
        }.get(word)
        if handler is not None:
            handler(attributes)

    def _start_key(self, attributes: dict[str, str]) -> None:
        if attributes.get("attr.name") == "weight" and attributes.get("for", "all") in ("node", "all"):
            self._key = attributes.get("id")
        self._in_weight_key = self._key is not None and attributes.get("id") == self._key

    def _start_graph(self, attributes: dict[str, str]) -> None:
        self._graphs += 1
        if self._graphs > 1:
            self._fail("there is a second graph", "keep one graph a file")
        self.directed = attributes.get("edgedefault") == "directed"

    def _start_node(self, attributes: dict[str, str]) -> None:
        name = attributes.get("id", "")
        if not name or not name.isprintable():
            self._fail(f"the node id {name!r} is no name", "give every node an id without control characters")
        if name in self.numbers:
            self._fail(f"the node {name!r} stands there twice", "give every node its own id")
        self._node = self.numbers[name] = len(self.numbers)

    def _start_edge(self, attributes: dict[str, str]) -> None:
        if "source" not in attributes or "target" not in attributes:
            self._fail("the edge lacks a source or a target", "give both")
        self._ends.append((attributes["source"], attributes["target"], self._parser.CurrentLineNumber))

    def _start_data(self, attributes: dict[str, str]) -> None:
        if self._path[-2:-1] == ["node"] and self._key is not None and attributes.get("key") == self._key:
            self._text = []

    def _start_default(self, attributes: dict[str, str]) -> None:
        if self._path[-2:-1] == ["key"] and self._in_weight_key:
            self._text = []

    def _characters(self, text: str) -> None:
        if self._text is not None:
            self._text.append(text)

    def _end(self, tag: str) -> None:
        word = self._path.pop()
        if word in ("data", "default") and self._text is not None:
            text, self._text = "".join(self._text), None
            self._take_weight(word, text)

    def _take_weight(self, word: str, text: str) -> None:
        try:
            weight = weight_from(text, self._scale)
        except BadInput as wrong:
            self._fail(wrong.problem, wrong.remedy)
        if word == "default":
            self.default = weight
        elif self._node is not None:
            self.weights[self._node] = weight
