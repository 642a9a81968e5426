"""`nearchord check`: what an answer claims, confirmed from the graph alone."""

from __future__ import annotations

import sys

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.exits import Exit
from nearchord.cli.graphs import read
from nearchord.cli.options import Source
from nearchord.cli.recorded import load


@click.command(short_help="Confirm an answer from its graph alone.")
@click.argument("graph_file", metavar="GRAPH")
@click.argument("answer_file", metavar="ANSWER.json")
@options.reads
def check(graph_file: str, answer_file: str, source: Source) -> int:
    """Check the answer in ANSWER.json (as --json printed it, - for stdin) against the graph in GRAPH.

    Uses neither the service nor the solver. Prints what was confirmed. Without a proof only the choice and its value
    can be confirmed, not that nothing better exists: the exit code is then 1.
    """
    graph = read(graph_file, source)
    confirmed = nearchord.check(graph, load(answer_file, graph))
    sys.stdout.writelines(f"confirmed: {what}\n" for what in confirmed.what)
    sys.stdout.writelines(f"not confirmed: {what}\n" for what in confirmed.not_confirmed)
    return Exit.OTHER if confirmed.not_confirmed else Exit.ANSWERED
