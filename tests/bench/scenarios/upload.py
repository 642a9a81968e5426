"""Upload of a large graph: from numpy arrays to stored, against writing and syncing the same bytes to a file.

Data folders and the plain file lie in the results folder, on one file system; runs alternate. The first round is not
counted: it brings generators, page cache and memory to the state in which the later ones find them.
"""

import os
from pathlib import Path
from statistics import median
from tempfile import TemporaryDirectory
from time import perf_counter

import nearchord
import numpy as np

from bench import private, small
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

RUNS = 5
PROMISED = {"canonical": 5, "unsorted": 12}


def measure(options: Options) -> Report:
    """Run the scenario: n = 1,000,000 and m about 10^7, or a hundredth."""
    n = 10_000 if options.quick else 1_000_000
    problem = windows(n, 20, n // 1000, options.seed)
    report = Report("upload", {"n": n, "m": problem.m, "runs": RUNS, "seed": options.seed})
    edges = {"canonical": (problem.low, problem.high), "unsorted": small.shuffled(problem, options.seed)}
    options.out.mkdir(parents=True, exist_ok=True)
    with TemporaryDirectory(dir=options.out) as name:
        plain = [*map(bytes, small.as_graph(problem).canonical()), problem.weights.tobytes()]
        _, *runs = [_run(problem, plain, edges, Path(name)) for _ in range(1 + RUNS)]
    report.parameters["bytes"] = sum(map(len, plain))
    seconds = median(run["file"]["all s"] for run in runs)
    rows = [_middle(kind, [run[kind] for run in runs], seconds) for kind in ("file", *edges)]
    report.tables["numpy arrays to stored"] = rows
    if not options.quick:
        ratios = {row["arrays"]: row["ratio"] for row in rows}
        report.targets = [
            Target(f"upload from {kind} arrays over plain file", "<=", promised, ratios[kind], "times")
            for kind, promised in PROMISED.items()
        ]
    return report


def _run(
    problem: Problem, plain: list[bytes], edges: dict[str, tuple[np.ndarray, np.ndarray]], folder: Path
) -> dict[str, Row]:
    """One measurement of each kind, each upload to a service of its own that has never seen the graph."""
    with TemporaryDirectory(dir=folder) as name:
        rows = {"file": _write(plain, Path(name) / "plain")}
        for kind, (one, other) in edges.items():
            with private.warm(Path(name) / kind) as service:
                rows[kind] = _upload(service, problem, one, other)
    return rows


def _upload(service: nearchord.Service, problem: Problem, one: np.ndarray, other: np.ndarray) -> Row:
    begun = perf_counter()
    graph = nearchord.Graph.from_arrays(problem.n, one, other, problem.weights)
    ready = perf_counter()
    service.upload(graph)
    ended = perf_counter()
    return {"arrays to graph s": ready - begun, "upload s": ended - ready, "all s": ended - begun}


def _write(pieces: list[bytes], path: Path) -> Row:
    begun = perf_counter()
    with path.open("wb") as file:
        file.writelines(pieces)
        file.flush()
        os.fsync(file.fileno())
    ended = perf_counter()
    return {"arrays to graph s": None, "upload s": None, "all s": ended - begun}


def _middle(kind: str, rows: list[Row], plain: float) -> Row:
    middle = sorted(rows, key=lambda row: row["all s"])[len(rows) // 2]
    return {"arrays": kind, **middle, "ratio": middle["all s"] / plain}
