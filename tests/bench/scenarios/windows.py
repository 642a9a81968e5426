"""Time windows with cleared pairs: the project's solver against two general-purpose solvers.

All in one run, each run in a fresh process: the solver after its warm-up (median of three), HiGHS and CP-SAT
with one constraint an edge and with all maximal cliques given (listing them is not counted), each with every
thread count asked for.  A ratio compares with the better thread count;
promises are about wall time, the ratio of processor times tells how far other programs disturbed it.
"""

from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

from bench import cliques, fresh, general, models, worker
from bench.cliques import Groups
from bench.general import Run
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

MEMORY = 2**30
SECONDS = 90.0
PROMISED = {"cliques": 20, "edges": 150}


def measure(options: Options) -> Report:
    """Run the scenario: n = 100,000 and 500 removed edges, or a twentieth of both."""
    n, removed = (5_000, 25) if options.quick else (100_000, 500)
    seconds = options.seconds or (30.0 if options.quick else SECONDS)
    problem = windows(n, 20, removed, options.seed)
    parameters = {"n": n, "m": problem.m, "removed": removed, "seed": options.seed, "limit_seconds": seconds}
    report = Report("windows-100k", parameters)
    with TemporaryDirectory() as name:
        ours = _own(problem, Path(name), seconds, report)
        rows = [_own_row(ours)]
        if options.general:
            rows += _general_rows(problem, seconds, options.threads)
    for row in rows:
        row["ratio"] = row["seconds"] / ours.seconds
        row["CPU ratio"] = row["CPU s"] / ours.spent.cpu_seconds
    report.tables["heaviest independent set"] = rows
    _agree(rows)
    if not options.quick:
        report.targets = _targets(rows)
    return report


def _own(problem: Problem, folder: Path, seconds: float, report: Report) -> worker.Timing:
    done = fresh.run(worker.solve_stored, problem.save(folder), 3, MEMORY, seconds)
    report.parameters["runs_seconds"] = [timing.seconds for timing in done.result]
    median = worker.median(done.result)
    report.phases = [{"n": problem.n, **median.phases}]
    return median


def _own_row(timing: worker.Timing) -> Row:
    outcome = timing.outcome
    return {
        "solver": "nearchord",
        "formulation": "graph",
        "threads": 1,
        "status": outcome.verdict.name.lower(),
        "value": outcome.value,
        "bound": outcome.bound,
        "build s": None,
        "CPU s": timing.spent.cpu_seconds,
        "seconds": timing.seconds,
    }


def _general_rows(problem: Problem, seconds: float, threads: tuple[int, ...]) -> list[Row]:
    rows = []
    for formulation, groups in (("cliques", cliques.maximal_cliques(problem)), ("edges", cliques.edges(problem))):
        model = models.independent_set(problem.weights, groups)
        for solver in general.NAMES:
            for count in threads:
                run = fresh.run(general.run, solver, model, count, seconds).result
                rows.append(_general_row(solver, formulation, groups, count, run))
    return rows


def _general_row(solver: str, formulation: str, groups: Groups, threads: int, run: Run) -> Row:
    return {
        "solver": solver,
        "formulation": f"{groups.count:,} {formulation}",
        "threads": threads,
        "status": run.status,
        "value": run.value,
        "bound": run.bound,
        "build s": run.build_seconds,
        "CPU s": run.spent.cpu_seconds,
        "seconds": run.seconds,
    }


def _agree(rows: list[Row]) -> None:
    proven: set[Any] = {row["value"] for row in rows if row["status"] in ("optimal", "proven")}
    if len(proven) > 1:
        raise AssertionError(f"solvers claim different optima: {sorted(proven)}")


def _targets(rows: list[Row]) -> list[Target]:
    """A run that hit its limit counts with the limit: the true ratio is larger."""
    targets = [Target("worker time after warm-up", "<=", 0.2, rows[0]["seconds"])]
    for formulation, promised in PROMISED.items():
        ratios = [row["ratio"] for row in rows if row["formulation"].endswith(formulation)]
        if ratios:
            targets.append(Target(f"best general solver given {formulation}", ">=", promised, min(ratios), "times"))
    return targets
