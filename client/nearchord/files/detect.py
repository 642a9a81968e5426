"""Which format a document is in: by the suffix of its name, then by its first bytes."""

from __future__ import annotations

from pathlib import PurePath

from nearchord.files.document import Document

SUFFIXES = {
    ".col": "dimacs",
    ".clq": "dimacs",
    ".dimacs": "dimacs",
    ".edge": "dimacs",
    ".csv": "csv",
    ".tsv": "csv",
    ".graphml": "graphml",
    ".xml": "graphml",
    ".json": "node-link",
}
DIMACS_LETTERS = (b"c", b"p")
LOOK = 4096


def format_of(document: Document) -> str:
    """The format; FileProblem when neither name nor content tell it."""
    suffixes = [suffix.lower() for suffix in PurePath(document.name).suffixes if suffix.lower() != ".gz"]
    if suffixes and suffixes[-1] in SUFFIXES:
        return SUFFIXES[suffixes[-1]]
    return _by_content(document)


def _by_content(document: Document) -> str:
    start = document.data[:LOOK].lstrip()
    first = start.split(b"\n", 1)[0]
    if start.startswith(b"<"):
        return "graphml"
    if start.startswith(b"{"):
        return "node-link"
    if first.split()[:1] and first.split()[0] in DIMACS_LETTERS:
        return "dimacs"
    if b"source" in first.lower() and b"target" in first.lower():
        return "csv"
    raise document.problem(
        None, "neither name nor content tell its format", "say format= (on the command line --format): csv, dimacs, ..."
    )
