"""`nearchord check`: what an answer claims, confirmed from the graph alone."""

from __future__ import annotations

import sys
from dataclasses import replace

import click

import nearchord
from nearchord.cli import options, proof_file
from nearchord.cli.exits import Exit
from nearchord.cli.graphs import read
from nearchord.cli.options import Source
from nearchord.cli.recorded import load


@click.command(short_help="Confirm an answer from its graph alone.")
@click.argument("graph_file", metavar="GRAPH")
@click.argument("answer_file", metavar="ANSWER.json")
@options.reads
@click.option("--proof", "proof", metavar="FILE", help="The proof of the bound, as `solve --proof` wrote it.")
def check(graph_file: str, answer_file: str, source: Source, proof: str | None) -> int:
    """Check the answer in ANSWER.json (as --json printed it, - for stdin) against the graph in GRAPH.

    Uses neither the service nor the solver. Prints what was confirmed. Without the proof of a choice only the choice
    and its value can be confirmed, not that nothing better exists: the exit code is then 1.
    """
    graph = read(graph_file, source)
    answer = load(answer_file, graph)
    if proof is not None:
        answer = replace(answer, columns={**answer.columns, **proof_file.read(proof, graph)})
    confirmed = nearchord.check(graph, answer)
    sys.stdout.writelines(f"confirmed: {what}\n" for what in confirmed.what)
    sys.stdout.writelines(f"not confirmed: {what}\n" for what in confirmed.not_confirmed)
    if answer.proof_bytes:
        print(f"the proof takes {proof_file.size_of(answer)}")
    return Exit.OTHER if confirmed.not_confirmed else Exit.ANSWERED
