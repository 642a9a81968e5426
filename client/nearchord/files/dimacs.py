"""DIMACS edge format: `p edge n m`, then `n v w` vertex weights and `e u v` edges, vertices from 1; `c` comments.

The names of the vertices are their numbers as written in the file, "1" to "n". A vertex without an `n` line weighs 1
when others have one.
"""

from __future__ import annotations

import gzip
from dataclasses import dataclass
from os import PathLike
from typing import IO, cast

import numpy as np
from numpy.typing import NDArray

from nearchord.canonical import LARGEST_N
from nearchord.errors import BadInput
from nearchord.files import assemble, table
from nearchord.files.document import Document
from nearchord.files.number import weight_from
from nearchord.graph import Graph

COMMENT, PROBLEM, WEIGHT, EDGE = (ord(letter) for letter in "cpne")
LARGEST_PLAIN_SCALE = 10**8
"""With plain weights, which have ten digits at most, the products stay below 2^62."""
PROBLEM_WORDS = ("edge", "edges", "col")


@dataclass(frozen=True)
class Problem:
    """The `p` line: its number in the file, vertices and edges announced."""

    line: int
    n: int
    m: int


def read(document: Document, scale: int) -> Graph:
    """The graph of a document; FileProblem names the line that is wrong. Time and memory O(bytes + m log m)."""
    lines = table.split(document.data)
    problem = _problem(document, lines)
    u, v = _edges(document, lines, problem)
    edges = assemble.distinct_edges(u, v)
    _check_count(document, problem, len(u), edges)
    weights = _weights(document, lines, problem, scale)
    names = [str(number) for number in range(1, problem.n + 1)]
    return assemble.build(document, problem.n, edges, weights, names)


def _problem(document: Document, lines: table.Lines) -> Problem:
    unknown = np.flatnonzero(~np.isin(lines.kind, (table.NOTHING, COMMENT, PROBLEM, WEIGHT, EDGE)))
    if unknown.size:
        start = lines.text(int(unknown[0]))[:20].split(" ")[0]
        raise document.problem(
            int(unknown[0]) + 1,
            f"the line begins with {start!r}",
            "lines begin with c, p, n or e; mark notes with c",
        )
    found = np.flatnonzero(lines.kind == PROBLEM)
    if not found.size:
        raise document.problem(None, "there is no line `p edge n m`", "add it before the first edge")
    if found.size > 1:
        raise document.problem(int(found[1]) + 1, "a second line `p`", "keep one")
    early = np.flatnonzero(np.isin(lines.kind[: found[0]], (WEIGHT, EDGE)))
    if early.size:
        raise document.problem(
            int(early[0]) + 1, "this line stands before the line `p`", "move the line `p` to the top"
        )
    return _parsed_problem(document, int(found[0]) + 1, lines.text(int(found[0])))


def _parsed_problem(document: Document, line: int, text: str) -> Problem:
    words = text.split()
    numbers = [int(word) for word in words[2:] if word.isascii() and word.isdigit() and len(word) <= 18]
    if len(words) != 4 or words[0] != "p" or words[1] not in PROBLEM_WORDS or len(numbers) != 2:
        raise document.problem(line, f"{text.strip()[:60]!r} is no problem line", "write `p edge n m` with two numbers")
    if numbers[0] > LARGEST_N:
        raise document.problem(line, f"{numbers[0]} vertices are too many", f"at most {LARGEST_N} are possible")
    return Problem(line, numbers[0], numbers[1])


def _edges(document: Document, lines: table.Lines, problem: Problem) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Endpoints from 0 of the `e` lines, in their order."""
    chosen = np.flatnonzero(lines.kind == EDGE)
    pairs = table.two_columns(lines, chosen)
    if pairs is None:
        pairs = _edges_by_line(document, lines, chosen)
    outside = (pairs < 1) | (pairs > problem.n)
    if outside.any():
        row = int(outside.any(axis=1).argmax())
        end = int(pairs[row][outside[row]][0])
        raise document.problem(int(chosen[row]) + 1, f"vertex {end} does not exist", _range_remedy(problem))
    return pairs[:, 0] - 1, pairs[:, 1] - 1


def _range_remedy(problem: Problem) -> str:
    return f"line {problem.line} announces vertices 1 to {problem.n}" if problem.n else "the graph has no vertices"


def _edges_by_line(document: Document, lines: table.Lines, chosen: NDArray[np.int64]) -> NDArray[np.int64]:
    """Like `table.two_columns`, line by line, to find and name what is wrong."""
    pairs = np.zeros((len(chosen), 2), np.int64)
    for row, line in enumerate(chosen.tolist()):
        words = lines.text(line).split()
        if len(words) != 3 or words[0] != "e" or not all(_is_number(word) for word in words[1:]):
            raise document.problem(
                line + 1, f"{' '.join(words)[:60]!r} is no edge", "write `e u v` with two vertex numbers from 1"
            )
        pairs[row] = int(words[1]), int(words[2])
    return pairs


def _is_number(word: str) -> bool:
    return word.isascii() and word.removeprefix("-").isdigit() and len(word) <= 18


def _check_count(document: Document, problem: Problem, listed: int, edges: assemble.Edges) -> None:
    """Files of this format count edges once or once a direction, with or without self-loops; anything else is a file
    that was cut or edited."""
    if problem.m in (listed, listed - edges.loops, len(edges.keys)):
        return
    raise document.problem(
        problem.line,
        f"{problem.m} edges are announced, but {listed} are listed ({len(edges.keys)} different ones)",
        f"complete the file, or write `p edge {problem.n} {listed}`",
    )


def _weights(document: Document, lines: table.Lines, problem: Problem, scale: int) -> NDArray[np.int64] | None:
    """Weights of all vertices; None where the file has none."""
    chosen = np.flatnonzero(lines.kind == WEIGHT)
    if not chosen.size:
        return None
    pairs = table.two_columns(lines, chosen)
    if pairs is None or scale > LARGEST_PLAIN_SCALE or not _distinct_vertices(pairs[:, 0], problem.n):
        return assemble.spread(_weights_by_line(document, lines, chosen, problem, scale), problem.n, scale)
    weights = np.full(problem.n, scale, np.int64)
    weights[pairs[:, 0] - 1] = pairs[:, 1] * scale
    return weights


def _distinct_vertices(vertices: NDArray[np.int64], n: int) -> bool:
    inside = bool(((vertices >= 1) & (vertices <= n)).all())
    return inside and int(np.bincount(vertices).max()) == 1


def _weights_by_line(
    document: Document, lines: table.Lines, chosen: NDArray[np.int64], problem: Problem, scale: int
) -> dict[int, int]:
    """Weights by vertex from 0, line by line, exact for decimals; names what is wrong."""
    given: dict[int, int] = {}
    for line in chosen.tolist():
        words = lines.text(line).split()
        if len(words) != 3 or words[0] != "n" or not _is_number(words[1]):
            raise document.problem(line + 1, f"{' '.join(words)[:60]!r} is no weight", "write `n v w`: vertex, weight")
        vertex = int(words[1])
        if not 1 <= vertex <= problem.n:
            raise document.problem(line + 1, f"vertex {vertex} does not exist", _range_remedy(problem))
        if vertex - 1 in given:
            raise document.problem(line + 1, f"vertex {vertex} has a weight already", "keep one line `n` a vertex")
        try:
            given[vertex - 1] = weight_from(words[2], scale)
        except BadInput as wrong:
            raise document.problem(line + 1, wrong.problem, wrong.remedy) from None
    return given


def write(graph: Graph, target: str | PathLike[str] | IO[bytes]) -> None:
    """Writes a graph, gzipped where the path ends in `.gz`; see `nearchord.files.write_dimacs`."""
    text = _written(graph).encode()
    if hasattr(target, "write"):
        cast("IO[bytes]", target).write(text)
        return
    with gzip.open(target, "wb") if str(target).endswith(".gz") else open(target, "wb") as file:
        file.write(text)


def _written(graph: Graph) -> str:
    u, v = graph.edges()
    weights = [] if graph.weights is None else graph.weights.tolist()
    lines = [f"p edge {graph.n} {graph.m}"]
    lines.extend(f"n {vertex} {weight}" for vertex, weight in enumerate(weights, 1))
    lines.extend(f"e {a} {b}" for a, b in zip((u + 1).tolist(), (v + 1).tolist(), strict=True))
    return "\n".join(lines) + "\n"
