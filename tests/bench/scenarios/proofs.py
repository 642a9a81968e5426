"""Certificates: what writing them adds to a solve, how large they are, and how long the checker takes.

The solve is timed as a worker runs it, warmed up, and the certificate within it; the checker runs on what came out.
"""

from collections.abc import Iterator
from statistics import median
from time import perf_counter
from typing import Any

import nearchord
import nearchord_solve as ns
import nearchord_solve.sweep.independent as passes
from certified import answer_of
from nearchord.checks.edges import Edges
from nearchord.checks.splitting import Splitting

from bench import fresh, worker
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

ORDERED = (
    (nearchord.Clique(), ns.Clique()),
    (nearchord.ColourableSubgraph(colours=2), ns.ColourableSubgraph(2)),
    (nearchord.InducedForest(), ns.InducedForest()),
)
SIZES = ((1_000, 20), (100_000, 500))
QUICK = ((1_000, 20),)
REPEATS = 9
SECONDS = 60.0


def measure(options: Options) -> Report:
    """Run the scenario."""
    limit = options.seconds or SECONDS
    report = Report("proofs", {"limit_seconds": limit, "seed": options.seed})
    problems = [windows(n, 20, removed, options.seed) for n, removed in (QUICK if options.quick else SIZES)]
    rows = fresh.run(prove_all, problems, limit).result
    report.tables["certificates of time windows"] = rows
    orders = fresh.run(order_all, problems, limit).result
    report.tables["elimination orders of time windows"] = orders
    if not options.quick:
        last = rows[-1]
        report.targets = [
            *_targets_of(orders[-len(ORDERED) :]),
            Target("writing the certificate, share of the solve, n = 10^5", "<=", 15, last["share %"], "%"),
            Target("size, n = 10^5", "<=", 64, last["bytes a vertex"], "bytes a vertex"),
            Target("checker, n = 10^5", "<=", 15, last["check s"]),
        ]
    return report


def prove_all(problems: list[Problem], limit: float) -> list[Row]:
    """Solve and check each, after the warm-up."""
    worker.warm_up()
    return [_prove(problem, limit) for problem in problems]


def _targets_of(rows: list[Row]) -> Iterator[Target]:
    for row in rows:
        what = f"{row['question']}, n = 10^5"
        yield Target(f"size, {what}", "<=", 64, row["bytes a vertex"], "bytes a vertex")
        yield Target(f"checker, {what}", "<=", 15, row["check s"])


def order_all(problems: list[Problem], limit: float) -> list[Row]:
    """Solve and check the questions whose certificate is an order, after the warm-up."""
    worker.warm_up()
    return [_order(problem, limit, *questions) for problem in problems for questions in ORDERED]


def _order(problem: Problem, limit: float, asked: nearchord.Question, question: Any) -> Row:
    run = worker.median([worker.solve(problem, ns.Budget(), limit, question) for _ in range(REPEATS)])
    graph = nearchord.Graph.from_arrays(problem.n, problem.low, problem.high, weights=problem.weights)
    answer = answer_of(graph, asked, run.outcome)
    begun = perf_counter()
    confirmed = nearchord.check(graph, answer)
    checked = perf_counter() - begun
    return {
        "question": " ".join([asked.name, *(f"q={n}" for n in [getattr(asked, "colours", None)] if n)]),
        "n": problem.n,
        "m": problem.m,
        "solve s": run.seconds,
        "states": run.outcome.states,
        "bytes a vertex": answer.proof_bytes / problem.n,
        "check s": checked,
        "confirmed": "NO" if confirmed.not_confirmed else "yes",
    }


def _prove(problem: Problem, limit: float) -> Row:
    spent: list[float] = []
    write = passes.certify_sweep

    def timed(*arguments: Any) -> Any:
        begun = perf_counter()
        made = write(*arguments)
        spent.append(perf_counter() - begun)
        return made

    passes.certify_sweep = timed
    runs = [worker.solve(problem, ns.Budget(), limit) for _ in range(REPEATS)]
    passes.certify_sweep = write
    outcome = runs[-1].outcome
    graph = nearchord.Graph.from_arrays(problem.n, problem.low, problem.high, weights=problem.weights)
    begun = perf_counter()
    bound = Splitting(graph.n, outcome.columns).bound(Edges(graph.n, *graph.edges()), problem.weights)
    checked = perf_counter() - begun
    solve, writing = median(run.seconds for run in runs), median(spent)
    return {
        "n": problem.n,
        "m": problem.m,
        "solve s": solve,
        "certificate s": writing,
        "share %": 100 * writing / (solve - writing),
        "bytes a vertex": sum(column.nbytes for column in outcome.columns.values()) / problem.n,
        "check s": checked,
        "confirmed": "yes" if bound == outcome.bound else "NO",
    }
