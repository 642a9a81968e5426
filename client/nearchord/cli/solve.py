"""`nearchord solve`: one graph, one question, one answer."""

from __future__ import annotations

import click

from nearchord.cli import options, proof_file
from nearchord.cli.connection import detaching, remote_or_private
from nearchord.cli.exits import of_verdict
from nearchord.cli.follow import follow
from nearchord.cli.graphs import read
from nearchord.cli.layout import print_json
from nearchord.cli.options import Ask, Source
from nearchord.cli.progress import JobDisplay
from nearchord.cli.record import record, show
from nearchord.cli.subject import Subject


@click.command(short_help="Answer a question about one graph.")
@options.graph_argument
@options.asks
@options.reads
@options.server
@options.as_json
@click.option("--proof", "proof", metavar="FILE", help="Write the proof of the bound to FILE, for `check`.")
def solve(file: str, ask: Ask, source: Source, server: str | None, as_json: bool, proof: str | None) -> int:
    """Answer a question about the graph in FILE (- for stdin).

    Without --server a private service is started for this one answer. Ctrl-C leaves a job on a server running and says
    how to come back to it.
    """
    graph = read(file, source)
    asked = ask.about(graph)
    with JobDisplay() as display, remote_or_private(server, display) as service:
        job = ask.submit(service, graph, asked)
        with detaching("job", job.id, server):
            answer = follow(service, job, display)
    if proof is not None and not proof_file.write(proof, answer):
        click.echo(f"note: no proof was written to {proof}: {proof_file.why_none(answer)}", err=True)
    about = Subject.of(graph, asked.titles)
    if as_json:
        print_json(record(answer, about))
    else:
        show(answer, about)
    return of_verdict(answer.verdict)
