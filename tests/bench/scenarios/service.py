"""The whole service over loopback, by the client library: latency, throughput, one large graph, start.

Every job is durable before it is accepted; the data folders lie in the results folder, on its file system.
"""

from pathlib import Path
from tempfile import TemporaryDirectory
from time import perf_counter

import nearchord
import numpy as np

from bench import private, small
from bench.options import Options
from bench.problem import windows
from bench.report import Report, Row, Target

LARGE_RUNS = 3


def measure(options: Options) -> Report:
    """Run the scenario; the cold start is left out of the quick one, which compiles nothing."""
    jobs, batch, n = (20, 200, 5_000) if options.quick else (300, 5_000, 100_000)
    report = Report("service", {"jobs": jobs, "batch": batch, "n": n, "seed": options.seed})
    options.out.mkdir(parents=True, exist_ok=True)
    with TemporaryDirectory(dir=options.out) as name:
        folder = Path(name)
        starts = {} if options.quick else _starts(folder)
        with private.warm(folder / "main") as service:
            latency = _latency(service, jobs, options.seed)
            throughput = _batch(service, batch, options.seed + jobs)
            large = [_large(service, n, options.seed + run, report) for run in range(LARGE_RUNS)]
    report.tables["small jobs (10 vertices), one after the other"] = [latency]
    report.tables["batch of small jobs"] = [throughput]
    report.tables[f"time windows, n = {n:,}"] = large
    if starts:
        report.tables["start to first answer"] = [starts]
        report.targets = _targets(latency, throughput, large, starts)
    return report


def _starts(folder: Path) -> Row:
    kernels = folder / "kernels"
    return {
        "cold kernels s": private.start_to_answer(folder / "cold", kernels),
        "warm kernels s": private.start_to_answer(folder / "warm", kernels),
    }


def _latency(service: nearchord.Service, jobs: int, seed: int) -> Row:
    seconds = []
    for graph in small.graphs(jobs, seed):
        begun = perf_counter()
        service.submit(graph, nearchord.IndependentSet()).answer()
        seconds.append(perf_counter() - begun)
    median, high = np.percentile(seconds, (50, 99))
    return {"jobs": jobs, "median ms": 1e3 * median, "99th percentile ms": 1e3 * high, "slowest ms": 1e3 * max(seconds)}


def _batch(service: nearchord.Service, jobs: int, seed: int) -> Row:
    items = [nearchord.JobRequest(graph, nearchord.IndependentSet()) for graph in small.graphs(jobs, seed)]
    begun = perf_counter()
    batch = service.submit_batch(items)
    accepted = perf_counter()
    answers = list(batch.answers())
    ended = perf_counter()
    return {
        "jobs": jobs,
        "proven": sum(answer.verdict == nearchord.Verdict.PROVEN for answer in answers),
        "accepted s": accepted - begun,
        "all answers s": ended - begun,
        "jobs/s": jobs / (ended - begun),
    }


def _large(service: nearchord.Service, n: int, seed: int, report: Report) -> Row:
    """From numpy arrays to the answer; a seed of its own each time, so that nothing is known before."""
    problem = windows(n, 20, n // 200, seed)
    begun = perf_counter()
    graph = small.as_graph(problem)
    ready = perf_counter()
    job = service.submit(graph, nearchord.IndependentSet())
    accepted = perf_counter()
    answer = job.answer()
    ended = perf_counter()
    report.phases.append({"seed": seed, **{phase.name.lower(): spent for phase, spent in answer.provenance.phases}})
    return {
        "seed": seed,
        "m": problem.m,
        "verdict": answer.verdict.name,
        "arrays to graph s": ready - begun,
        "upload and submit s": accepted - ready,
        "wait for answer s": ended - accepted,
        "worker s": answer.seconds,
        "all s": ended - begun,
    }


def _targets(latency: Row, throughput: Row, large: list[Row], starts: Row) -> list[Target]:
    return [
        Target("small job, median", "<=", 20, latency["median ms"], "ms"),
        Target("small job, 99th percentile", "<=", 80, latency["99th percentile ms"], "ms"),
        Target("batch of 5,000", ">=", 150, throughput["jobs/s"], "jobs/s"),
        Target("n = 100,000 with upload, median", "<=", 1.5, float(np.median([row["all s"] for row in large]))),
        Target("first answer, cold kernels", "<=", 90, starts["cold kernels s"]),
        Target("first answer, warm kernel cache", "<=", 5, starts["warm kernels s"]),
    ]
