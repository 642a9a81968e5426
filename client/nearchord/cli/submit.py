"""`nearchord submit`: hand a job over and leave."""

from __future__ import annotations

import sys

import click

from nearchord.cli import options
from nearchord.cli.connection import remote
from nearchord.cli.exits import Exit
from nearchord.cli.graphs import read
from nearchord.cli.options import Ask, Source


@click.command(short_help="Hand over a job and print its id.")
@options.graph_argument
@options.asks
@options.reads
@options.server
def submit(file: str, ask: Ask, source: Source, server: str | None) -> int:
    """Submit the graph in FILE (- for stdin) as a job and print the job's id.

    The job is durable once its id is printed: `watch`, `answer` and `cancel` take the id.
    """
    graph = read(file, source)
    asked = ask.about(graph)
    with remote(server) as service:
        job = ask.submit(service, graph, asked)
    sys.stdout.write(f"{job.id}\n")
    return Exit.ANSWERED
