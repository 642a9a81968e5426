"""`nearchord check`: what an answer claims, confirmed from the graph alone."""

from __future__ import annotations

import sys
from dataclasses import replace

import click

import nearchord
from nearchord.cli import options, proof_file
from nearchord.cli.asking import OPTIONS, VectorFiles, takes
from nearchord.cli.exits import Exit, usage
from nearchord.cli.graphs import read
from nearchord.cli.options import Source
from nearchord.cli.recorded import load
from nearchord.question import Plan


@click.command(short_help="Confirm an answer from its graph alone.")
@click.argument("graph_file", metavar="GRAPH")
@click.argument("answer_file", metavar="ANSWER.json")
@options.brings_vectors
@options.reads
@click.option("--proof", "proof", metavar="FILE", help="The proof of the bound, as `solve --proof` wrote it.")
def check(graph_file: str, answer_file: str, source: Source, vectors: VectorFiles, proof: str | None) -> int:
    """Check the answer in ANSWER.json (as --json printed it, - for stdin) against the graph in GRAPH.

    Uses neither the service nor the solver. Prints what was confirmed. Without the proof of a choice only the choice
    and its value can be confirmed, not that nothing better exists: the exit code is then 1. Weights, scenarios and
    demands are not in the answer: give the files that it was asked with.
    """
    graph = read(graph_file, source)
    answer = load(answer_file, graph)
    if proof is not None:
        answer = replace(answer, columns={**answer.columns, **proof_file.read(proof, graph)})
    asked = vectors.read(_fitting(answer, vectors), graph).question
    confirmed = nearchord.check(graph, answer, question=asked)
    sys.stdout.writelines(f"confirmed: {what}\n" for what in confirmed.what)
    sys.stdout.writelines(f"not confirmed: {what}\n" for what in confirmed.not_confirmed)
    if answer.proof_bytes:
        print(f"the proof takes {proof_file.size_of(answer)}")
    return Exit.OTHER if confirmed.not_confirmed else Exit.ANSWERED


def _fitting(answer: nearchord.Answer, vectors: VectorFiles) -> nearchord.Question:
    """The question of the answer, to which the files given have to fit."""
    question, address = answer.question, answer.provenance.weights_address
    for field, there, needed in (
        ("scenarios", vectors.scenarios, question.scenario_count),
        ("demands", vectors.demands, isinstance(question, Plan) and address),
    ):
        if there and not takes(type(question), field):
            raise usage(f"{OPTIONS[field]} does not go with the question {question.name}", "leave it out")
        if needed and not there:
            raise usage(
                f"the answer is about {field}, which it does not carry", f"name their file: {OPTIONS[field]} FILE"
            )
    return question
