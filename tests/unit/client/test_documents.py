"""Any file: where it comes from, how it is packed and encoded, and which format it is in."""

from __future__ import annotations

import gzip
import io

import nearchord
import pytest
from nearchord import Graph, files
from unit.client.reading import DIMACS, complaint, read


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
