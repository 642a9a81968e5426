"""`nearchord batch`: many graphs, one question, JSON Lines."""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Iterator
from contextlib import contextmanager, nullcontext
from pathlib import Path
from typing import TextIO

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import detaching, remote_or_private
from nearchord.cli.exits import of_verdicts
from nearchord.cli.follow import follow_batch
from nearchord.cli.graphs import collect, read_all
from nearchord.cli.layout import write_json
from nearchord.cli.options import Ask, Source
from nearchord.cli.progress import BatchDisplay
from nearchord.cli.record import record
from nearchord.cli.subject import Subject


@click.command(short_help="Answer a question about many graphs.")
@click.argument("places", metavar="PATH...", nargs=-1, required=True)
@options.asks
@options.reads
@click.option("--out", metavar="FILE.jsonl", help="Write the lines to this file.  [default: stdout]")
@options.server
def batch(places: tuple[str, ...], ask: Ask, source: Source, out: str | None, server: str | None) -> int:
    """Answer one question about many graphs: PATH is a file, a folder of graph files, or a pattern.

    All jobs are accepted together or none is: one unreadable file stops the batch before it begins. Each line is the
    object that `solve --json` prints, with the key `file`; lines come in the order of the files, each as soon as those
    before it are there. Without --server a private service is started for the batch.
    """
    files = collect(places)
    graphs = read_all(files, source)
    asked = [ask.about(graph) for graph in graphs]
    requests = [ask.request(graphs[at], asked[at], Path(file).name[:200]) for at, file in enumerate(files)]
    verdicts: list[nearchord.Verdict] = []
    with _lines(out) as lines, BatchDisplay(len(files)) as display, remote_or_private(server, display) as service:
        submitted = service.submit_batch(requests, label=ask.label)
        with detaching("batch", submitted.id, server):
            for answer in follow_batch(service, submitted, display):
                verdicts.append(answer.verdict)
                at = answer.batch_index
                line = {"file": files[at], **record(answer, Subject.of(graphs[at], asked[at].titles))}
                with nullcontext() if out else display.aside():
                    write_json(line, lines)
    if sys.stderr.isatty():
        counts = ", ".join(f"{count:,} {verdict}" for verdict, count in Counter(verdicts).most_common())
        sys.stderr.write(f"{len(verdicts):,} answers{f' in {out}' if out else ''}: {counts}\n")
    return of_verdicts(verdicts)


@contextmanager
def _lines(out: str | None) -> Iterator[TextIO]:
    if out is None:
        yield sys.stdout
    else:
        with open(out, "w", encoding="utf-8") as file:
            yield file
