"""Real graphs with reference values: every file of ../shared/data/graphs, beside the two general-purpose solvers.

The heaviest independent set under the file's weights, or under ones where it has none.  The general solvers get
the maximal cliques (edges where there are too many cliques) and all cores; the project's solver runs on one.
Vertices are numbered at random first: some files number them in an order that gives the structure away.
"""

import csv
import os
from dataclasses import dataclass
from pathlib import Path
from statistics import median

import nearchord
import nearchord_solve as ns
import numpy as np

from bench import cliques, fresh, general, models, worker
from bench.general import Run
from bench.models import Model
from bench.options import Options
from bench.problem import Problem
from bench.report import Report, Row

ROOT = Path(__file__).resolve().parents[3]
FOLDER = Path(os.environ.get("NEARCHORD_SHARED_DATA", ROOT.parent / "shared" / "data"))
SECONDS = 60.0
QUICK_SECONDS = 5.0
MOST_CLIQUES = 50_000
MEMORY = 2**30


@dataclass(frozen=True)
class Case:
    """One file with the value that its table of references calls proved (None if none is)."""

    name: str
    problem: Problem
    reference: int | None


def measure(options: Options) -> Report:
    """Run the scenario on all files, or on every tenth."""
    limit = options.seconds or (QUICK_SECONDS if options.quick else SECONDS)
    cases = _cases(FOLDER, options.seed)[:: 10 if options.quick else 1]
    threads = max(options.threads)
    report = Report("data", {"files": len(cases), "limit_seconds": limit, "threads": threads, "seed": options.seed})
    ours = fresh.run(solve_all, [case.problem for case in cases], limit).result
    tasks = [_model(case.problem) for case in cases] if options.general else []
    solvers = general.NAMES if options.general else ()
    theirs = {solver: fresh.run(run_all, solver, tasks, threads, limit).result for solver in solvers}
    rows = [_row(case, ours[i], {solver: runs[i] for solver, runs in theirs.items()}) for i, case in enumerate(cases)]
    report.tables["heaviest independent set, real graphs"] = rows
    report.tables["summary"] = [_summary(rows)]
    report.phases = [{"file": case.name, **timing.phases} for case, timing in zip(cases, ours, strict=True)]
    return report


def solve_all(problems: list[Problem], limit: float) -> list[worker.Timing]:
    """Solve each by the project's solver, after its warm-up."""
    worker.warm_up()
    return [worker.solve(problem, ns.Budget(memory=MEMORY), limit) for problem in problems]


def run_all(solver: str, tasks: list[Model], threads: int, limit: float) -> list[Run]:
    """Run each by a general solver."""
    return [general.run(solver, model, threads, limit) for model in tasks]


def _cases(folder: Path, seed: int) -> list[Case]:
    if not (folder / "VALUES.csv").exists():
        raise SystemExit(f"no VALUES.csv in {folder}: set NEARCHORD_SHARED_DATA to the folder that holds it")
    with (folder / "VALUES.csv").open(encoding="utf-8", newline="") as lines:
        values = {row["name"]: row for row in csv.DictReader(lines)}
    return [_case(path, values.get(path.stem, {}), seed) for path in sorted((folder / "graphs").glob("*.col"))]


def _case(path: Path, values: dict[str, str], seed: int) -> Case:
    graph = nearchord.Graph.read(path)
    column = "mis_unit" if graph.weights is None else "mis_file"
    proved = int(values[column]) if values.get(f"{column}_proved") == "1" else None
    return Case(path.stem, as_problem(graph).shuffled(seed), proved)


def as_problem(graph: nearchord.Graph) -> Problem:
    """A graph as it was read, with ones where it has no weights."""
    low, high = graph.edges()
    weights = np.ones(graph.n, np.int64) if graph.weights is None else graph.weights
    return Problem(graph.n, low.astype(np.uint32), high.astype(np.uint32), weights)


def _model(problem: Problem) -> Model:
    try:
        groups = cliques.maximal_cliques(problem, MOST_CLIQUES)
    except cliques.TooManyCliquesError:
        groups = cliques.edges(problem)
    return models.independent_set(problem.weights, groups)


def _row(case: Case, ours: worker.Timing, theirs: dict[str, Run]) -> Row:
    outcome = ours.outcome
    best = min((run.seconds for run in theirs.values()), default=None)
    return {
        "file": case.name,
        "n": case.problem.n,
        "m": case.problem.m,
        "fill": outcome.fill,
        "largest bag": outcome.largest_bag,
        "verdict": outcome.verdict.name,
        "value": outcome.value,
        "bound": outcome.bound,
        "reference": case.reference,
        "gap %": _gap(outcome.value, outcome.bound),
        "agrees": "yes" if _agrees(case, ours, theirs) else "NO",
        "seconds": ours.seconds,
        **{f"{solver} s": run.seconds for solver, run in theirs.items()},
        **{f"{solver} status": run.status for solver, run in theirs.items() if not run.proven},
        "ratio": None if best is None else best / ours.seconds,
    }


def _gap(value: int | None, bound: int | None) -> float | None:
    return None if not value or bound is None else 100 * (bound - value) / value


def _agrees(case: Case, ours: worker.Timing, theirs: dict[str, Run]) -> bool:
    """Whether our interval holds the reference and every value that a general solver proved."""
    outcome = ours.outcome
    known = [case.reference] + [run.value for run in theirs.values() if run.proven]
    return all(outcome.value <= value <= outcome.bound for value in known if value is not None)


def _summary(rows: list[Row]) -> Row:
    ratios = [row["ratio"] for row in rows if row["ratio"] is not None]
    solved = [row for row in rows if row["verdict"] == "PROVEN"]
    return {
        "files": len(rows),
        "PROVEN": len(solved),
        "disagree": sum(row["agrees"] == "NO" for row in rows),
        "slowest PROVEN s": max((row["seconds"] for row in solved), default=None),
        "largest gap %": max((row["gap %"] or 0.0 for row in rows), default=None),
        "median ratio": median(ratios) if ratios else None,
        "least ratio": min(ratios, default=None),
    }
