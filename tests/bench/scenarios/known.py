"""A second job on a known graph, with other weights: what the structure kept by the first one saves.

The way a worker process goes, in one fresh process: from the stored graph's bytes to the answer, structures kept as
files.  Keeping happens after the answer, so it is listed apart.
"""

from pathlib import Path
from statistics import median
from tempfile import TemporaryDirectory
from time import perf_counter

import nearchord_solve as ns
import numpy as np
from nearchord_service.model.content import Bytes
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.work import runner
from nearchord_service.work.kept import Shelf
from nearchord_service.work.port import Task, TaskKey

from bench import fresh, worker
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

SIZES = (10_000, 100_000, 1_000_000)
QUICK_SIZES = (3_000,)
REPEATS = 5
MEMORY = 2**32


def measure(options: Options) -> Report:
    """Run the scenario: m about 10 n, one removed edge for each thousand vertices."""
    sizes = QUICK_SIZES if options.quick else SIZES
    report = Report("known-graph", {"sizes": sizes, "repeats": REPEATS, "seed": options.seed})
    rows = [_row(n, options) for n in sizes]
    report.tables["heaviest independent set, time windows: first and later jobs"] = rows
    if not options.quick:
        ratios = {row["n"]: row["later / first"] for row in rows}
        report.targets = [Target("later over first job, n = 10^5", "<=", 0.6, ratios[100_000], "times")]
    return report


def _row(n: int, options: Options) -> Row:
    problem = windows(n, 20, max(n // 1000, 1), options.seed)
    with TemporaryDirectory() as name:
        first, later, keeping, size = fresh.run(run_jobs, problem.save(Path(name))).result
    return {
        "n": n,
        "m": problem.m,
        "first s": first,
        "later s": later,
        "later / first": later / first,
        "keeping s": keeping,
        "kept MiB": size / 2**20,
    }


def run_jobs(folder: Path) -> tuple[float, float, float, int]:
    """Median worker seconds of first and of later jobs, seconds for keeping, bytes kept.

    Raises AssertionError if a later job says anything else than one that keeps nothing.
    """
    worker.warm_up()
    problem = Problem.load(folder)
    graph = _stored(problem, folder / "graph")
    first = [runner.answer(_task(graph, problem, turn), ns, _cells()) for turn in range(REPEATS)]
    shelf = Shelf(folder / "kept", 2**40, ns.VERSION)
    runner.answer(_task(graph, problem, 0), ns, _cells(), shelf=shelf)
    begun = perf_counter()
    shelf.store()
    keeping = perf_counter() - begun
    later = [runner.answer(_task(graph, problem, turn), ns, _cells(), shelf=shelf) for turn in range(REPEATS)]
    for one, other in zip(first, later, strict=True):
        assert (one.value, one.columns, one.states) == (other.value, other.columns, other.states)
    size = sum(path.stat().st_size for path in (folder / "kept").glob("*"))
    return median(one.seconds for one in first), median(one.seconds for one in later), keeping, size


def _stored(problem: Problem, path: Path) -> Bytes:
    row_ptr, targets = problem.canonical()
    with path.open("wb") as file:
        for array, dtype in ((problem.n, "<u4"), (problem.m, "<u8"), (row_ptr, "<u8"), (targets, "<u4")):
            file.write(np.asarray(array, dtype).tobytes())
    return Bytes(None, path)


def _task(graph: Bytes, problem: Problem, turn: int) -> Task:
    weights = np.random.default_rng(turn).integers(1, 1000, problem.n)
    return Task(
        key=TaskKey(str(turn), 1),
        graph=graph,
        weights=Bytes(weights.astype("<i8").tobytes(), None),
        vertices=problem.n,
        edges=problem.m,
        question=Question(QuestionName.INDEPENDENT_SET),
        budget=Budget(memory_bytes=MEMORY),
        when_over=WhenOver.BOUND,
        owner="bench",
        graph_address="windows",
    )


def _cells() -> np.ndarray:
    return np.zeros(ns.Monitor.CELLS, np.int64)
