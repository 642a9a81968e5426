"""`nearchord demo`: an invented planner's evening, solved and checked before your eyes."""

from __future__ import annotations

import sys
from pathlib import Path

import click

import nearchord
from nearchord.cli import options
from nearchord.cli.connection import detaching, remote_or_private
from nearchord.cli.exits import Exit, usage
from nearchord.cli.follow import follow_batch
from nearchord.cli.graphs import collect, read_all
from nearchord.cli.layout import print_table, print_text
from nearchord.cli.numbers import number
from nearchord.cli.options import Source
from nearchord.cli.progress import BatchDisplay

CHECKOUT_GRAPHS = Path(__file__).resolve().parents[3] / "deploy" / "demo" / "graphs"
HEADINGS = ("graph", "vertices", "edges", "fill", "verdict", "value", "seconds", "checked")
NUMBERS = frozenset({"vertices", "edges", "fill", "value", "seconds"})
PLAIN = Source(format=None, scale=None, weights=None)


@click.command(short_help="Solve the demo's graphs and check every answer.")
@click.option("--graphs", "folder", metavar="DIR", help="Solve these graphs.  [default: deploy/demo/graphs]")
@click.option("--seconds", type=float, default=10.0, show_default=True, help="Running time for each graph.")
@options.server
def demo(folder: str | None, seconds: float, server: str | None) -> int:
    """Solve the demo's conflict graphs and check every answer against its graph.

    Starts a private service, submits the graphs as one batch, asks for the most valuable conflict-free choice in each,
    and confirms every answer from the definition. Exits 0 only when all are answered and confirmed.
    """
    files = collect([_folder(folder)])
    graphs = read_all(files, PLAIN)
    budget = nearchord.Budget(seconds=seconds)
    requests = [
        nearchord.JobRequest(graph, nearchord.IndependentSet(), budget=budget, label=Path(file).name)
        for file, graph in zip(files, graphs, strict=True)
    ]
    _tell(Path(files[0]).parent / "scenario.txt")
    with BatchDisplay(len(files)) as display, remote_or_private(server, display) as service:
        batch = service.submit_batch(requests, label="demo")
        with detaching("batch", batch.id, server):
            answers = list(follow_batch(service, batch, display))
    return _report(graphs, answers)


def _folder(folder: str | None) -> str:
    if folder is None and not CHECKOUT_GRAPHS.is_dir():
        raise usage(
            "the demo's graphs come with a checkout, not with an installed package", "name a folder: --graphs DIR"
        )
    return folder or str(CHECKOUT_GRAPHS)


def _tell(scenario: Path) -> None:
    if scenario.is_file():
        for line in scenario.read_text(encoding="utf-8").splitlines():
            print_text(line)
        sys.stdout.write("\n")
        sys.stdout.flush()


def _report(graphs: list[nearchord.Graph], answers: list[nearchord.Answer]) -> int:
    rows, faults, open_ends = [], [], []
    for answer in answers:
        graph = graphs[answer.batch_index]
        fault = _fault(graph, answer)
        rows.append(_row(graph, answer, "failed" if fault else "yes"))
        if fault:
            faults.append(f"{answer.label}: {fault}")
        elif answer.verdict is nearchord.Verdict.BOUNDED:
            open_ends.append(f"{answer.label}: nothing is worth more than {number(answer.bound)} ({answer.reason})")
    print_table(HEADINGS, rows, flexible="graph", numbers=NUMBERS)
    confirmed = len(answers) - len(faults)
    sys.stdout.write("\n")
    for line in [*open_ends, *faults]:
        print_text(line)
    print_text("PROVEN: nothing is worth more. fill: pairs missing to a chordal graph. seconds: worker time.")
    print_text(
        f"{confirmed} of {len(graphs)} answers confirmed from the definition: no two chosen requests exclude "
        "each other, and their values add up."
    )
    return Exit.ANSWERED if confirmed == len(graphs) else Exit.OTHER


def _fault(graph: nearchord.Graph, answer: nearchord.Answer) -> str:
    """What is wrong with an answer; empty when it is confirmed."""
    if not answer.verdict.answered:
        return f"{answer.verdict}, {answer.reason}"
    try:
        nearchord.check(graph, answer)
    except nearchord.CheckFailed as failure:
        return str(failure)
    return ""


def _row(graph: nearchord.Graph, answer: nearchord.Answer, checked: str) -> tuple[str, ...]:
    fill = "" if answer.fill is None else f"{answer.fill:,}"
    value = "" if answer.value is None else number(answer.value)
    figures = (f"{graph.n:,}", f"{graph.m:,}", fill, str(answer.verdict), value, f"{answer.seconds:.3f}")
    return (answer.label, *figures, checked)
