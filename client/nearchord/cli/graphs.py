"""Graph files as the command line takes them: one file or stdin, or many from folders and patterns."""

from __future__ import annotations

import glob
import sys
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

import click

import nearchord
from nearchord.cli.exits import usage
from nearchord.cli.options import Source
from nearchord.files.detect import SUFFIXES

SHOWN = 20
"""Bad files that an error lists by name."""


def read(file: str, source: Source) -> nearchord.Graph:
    """Read one graph; `-` is stdin. What the reader dropped or assumed is said on stderr."""
    graph = nearchord.Graph.read(
        sys.stdin.buffer if file == "-" else file, source.format, source.scale, weights=source.weights
    )
    for notice in graph.notices:
        sys.stderr.write(f"note: {notice}\n")
    return graph


def collect(places: Iterable[str]) -> list[str]:
    """The graph files that files, folders and patterns stand for: each once, in the order given, folders by name."""
    return list(dict.fromkeys(file for place in places for file in _files(place)))


def _files(place: str) -> Iterator[str]:
    path = Path(place)
    if path.is_dir():
        found = sorted(str(file) for file in path.iterdir() if file.is_file() and _is_graph(file.name))
        if not found:
            raise usage(f"{place}: no graph file in this folder", f"graph files end in {', '.join(SUFFIXES)}")
        yield from found
    elif path.exists() or not glob.has_magic(place):
        yield place
    else:
        matches = sorted(file for file in glob.glob(place, recursive=True) if Path(file).is_file())
        if not matches:
            raise usage(f"{place}: the pattern matches no file", "check the folder and the pattern")
        yield from matches


def _is_graph(name: str) -> bool:
    return name.lower().removesuffix(".gz").endswith(tuple(SUFFIXES))


def read_all(files: Sequence[str], source: Source) -> list[nearchord.Graph]:
    """Read every file; when some cannot be taken, one error names them all."""
    graphs, problems = [], []
    for file in files:
        try:
            graphs.append(read(file, source))
        except nearchord.BadInput as problem:
            problems.append(str(problem))
        except OSError as problem:
            problems.append(f"{file}: {problem.strerror}")
    if problems:
        raise click.ClickException(_all_problems(problems, len(files)))
    return graphs


def _all_problems(problems: Sequence[str], files: int) -> str:
    head = f"{len(problems):,} of {files:,} files cannot be taken, so nothing was submitted:"
    rest = [f"and {len(problems) - SHOWN:,} more"] if len(problems) > SHOWN else []
    return "\n  ".join([head, *problems[:SHOWN], *rest])
