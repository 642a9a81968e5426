"""Every question on one graph: the project's solver beside two general-purpose solvers in their best formulation.

Small: time windows with n = 1,000 and 20 removed edges, each question once, the general solvers given all maximal
cliques (listing them is not counted), cuts for cycles, and a largest clique's colours.  Large: n = 100,000 and 500
removed edges, the project's solver alone, each question as a multiple of the plain first independent-set solve in
the same process.  ``fill`` and ``structure`` have their own scenarios.
"""

from typing import Any

import nearchord_solve as ns
import numpy as np

from bench import cliques, cycles, fresh, general, models, worker
from bench.cliques import Groups
from bench.models import Model
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

MEMORY = 2**30
SECONDS = 60.0
QUICK_SECONDS = 10.0
REPEATS = 5
SCENARIOS = 100
MOST_SMALL_SECONDS = 0.2
PROMISED = {"colourable-subgraph 2": 5.0, "induced-forest": 5.0, "clique": 1.5, "prices": 2.0, "100 scenarios": 5.0}

SMALL: dict[str, Any] = {
    "independent-set": ns.IndependentSet(),
    "vertex-cover": ns.VertexCover(),
    "clique": ns.Clique(),
    "colourable-subgraph 2": ns.ColourableSubgraph(colours=2),
    "colourable-subgraph 3": ns.ColourableSubgraph(colours=3),
    "induced-forest": ns.InducedForest(),
    "colouring": ns.Colouring(),
    "fractional-colouring": ns.FractionalColouring(),
    "prices": ns.IndependentSet(prices=True),
    "conflict prices": ns.IndependentSet(conflict_prices=True),
    "10 best": ns.IndependentSet(best=10),
    "count": ns.IndependentSet(count=True),
    "at most 100": ns.IndependentSet(limit=100),
    "prices, 2 colours": ns.ColourableSubgraph(colours=2, prices=True),
    "prices, forest": ns.InducedForest(prices=True),
}
LARGE = ("independent-set", "clique", "colourable-subgraph 2", "induced-forest", "prices", "100 scenarios")


def measure(options: Options) -> Report:
    """Run the scenario, small sizes only if quick."""
    limit = options.seconds or (QUICK_SECONDS if options.quick else SECONDS)
    report = Report("questions", {"limit_seconds": limit, "seed": options.seed})
    small = windows(300 if options.quick else 1_000, 20, 20, options.seed)
    ours = fresh.run(solve_each, small, list(SMALL), limit).result
    rows = [_row(name, ours[name], ours["independent-set"]) for name in SMALL]
    if options.general:
        _compare(rows, small, limit, max(options.threads))
    report.tables[f"time windows, n = {small.n}"] = rows
    if options.quick:
        return report
    large = windows(100_000, 20, 500, options.seed)
    timed = fresh.run(solve_each, large, list(LARGE), limit).result
    plain = timed["independent-set"]
    report.tables[f"time windows, n = {large.n:,}"] = [_row(name, timed[name], plain) for name in LARGE]
    slowest = max(row["seconds"] for row in rows)
    report.targets = [Target("slowest question, n = 1,000", "<=", MOST_SMALL_SECONDS, slowest)]
    for name, promised in PROMISED.items():
        ratio = timed[name].seconds / plain.seconds
        report.targets.append(Target(f"{name} over independent-set, n = 100,000", "<=", promised, ratio, "times"))
    return report


def solve_each(problem: Problem, names: list[str], limit: float) -> dict[str, worker.Timing]:
    """The median solve of each question, after the warm-up; rounds take turns, so that a disturbance hits all."""
    worker.warm_up()
    runs: dict[str, list[worker.Timing]] = {name: [] for name in names}
    for _ in range(REPEATS):
        for name in names:
            runs[name].append(_solve(problem, name, limit))
    return {name: worker.median(timings) for name, timings in runs.items()}


def _solve(problem: Problem, name: str, limit: float) -> worker.Timing:
    if name == "100 scenarios":
        weights = np.random.default_rng(1).integers(1, 1000, (SCENARIOS, problem.n))
        question = ns.IndependentSet(scenarios=SCENARIOS)
        return worker.solve(problem, ns.Budget(memory=MEMORY), limit, question, weights)
    weights = np.ones(problem.n, np.int64) if "colouring" in name else problem.weights
    return worker.solve(problem, ns.Budget(memory=MEMORY), limit, SMALL[name], weights)


def _row(name: str, timing: worker.Timing, plain: worker.Timing) -> Row:
    outcome = timing.outcome
    return {
        "question": name,
        "verdict": outcome.verdict.name,
        "value": str(outcome.value),
        "states": outcome.states,
        "proof": outcome.proof,
        "CPU s": timing.spent.cpu_seconds,
        "seconds": timing.seconds,
        "times plain": timing.seconds / plain.seconds,
        "CPU times": timing.spent.cpu_seconds / plain.spent.cpu_seconds,
    }


def _compare(rows: list[Row], problem: Problem, limit: float, threads: int) -> None:
    """Add seconds of the general solvers, and the best of them over ours, where a formulation is at hand."""
    groups = cliques.maximal_cliques(problem)
    near = cycles.neighbours(problem)
    for row in rows:
        model = _model(row["question"], problem, groups)
        if model is None:
            continue
        for solver in general.NAMES:
            run = fresh.run(general.run, solver, model, threads, limit, near).result
            row[f"{solver} s"] = run.seconds
            if not run.proven:
                row[f"{solver} status"] = run.status
            elif str(run.value) != row["value"] and row["question"] != "vertex-cover":
                raise AssertionError(f"{row['question']}: {solver} proves {run.value}, not {row['value']}")
        row["ratio"] = min(row[f"{solver} s"] for solver in general.NAMES) / row["seconds"]


def _model(question: str, problem: Problem, groups: Groups) -> Model | None:
    """The best formulation of a question; None where the general solvers have none of their own."""
    if question in ("independent-set", "vertex-cover"):
        return models.independent_set(problem.weights, groups)
    if question == "clique":
        return models.clique(problem.weights, groups)
    if question.startswith("colourable-subgraph"):
        return models.colour_classes(problem.weights, groups, int(question[-1]))
    if question == "induced-forest":
        return models.forest(problem.weights, groups)
    if question == "colouring":
        return models.colouring(problem.n, groups, int(np.diff(groups.ptr).max()) + 1)
    return None
