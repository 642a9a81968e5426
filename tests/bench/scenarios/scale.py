"""Growth with the size: worker time and peak memory of a first solve against numpy building the same rows.

Every measurement is one fresh process.  numpy gets the edges in canonical order, which suits its sort.
"""

from pathlib import Path
from tempfile import TemporaryDirectory

from bench import fresh, plot, worker
from bench.clock import Spent, Watch
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target

SIZES = (10_000, 30_000, 100_000, 300_000, 1_000_000)
QUICK_SIZES = (1_000, 3_000, 10_000)
REPEATS = 3
MEMORY = 2**32
SECONDS = 600.0


def measure(options: Options) -> Report:
    """Run the scenario: m about 10 n, one removed edge for each thousand vertices."""
    sizes = QUICK_SIZES if options.quick else SIZES
    report = Report("scale", {"sizes": sizes, "repeats": REPEATS, "seed": options.seed})
    rows = [_row(n, options, report) for n in sizes]
    report.tables["heaviest independent set, time windows"] = rows
    options.out.mkdir(parents=True, exist_ok=True)
    plot.growth(rows, options.out / "scale.png")
    if not options.quick:
        report.targets = _targets({row["n"]: row for row in rows})
    return report


def build_rows(folder: Path) -> Spent:
    """Time that numpy needs for the symmetric rows of a stored problem (median of REPEATS)."""
    problem = Problem.load(folder)
    runs = []
    for _ in range(REPEATS):
        watch = Watch()
        problem.symmetric()
        runs.append(watch.read())
    return sorted(runs, key=lambda spent: spent.seconds)[REPEATS // 2]


def _row(n: int, options: Options, report: Report) -> Row:
    removed = max(n // 1000, 1)
    problem = windows(n, 20, removed, options.seed)
    limit = options.seconds or SECONDS
    with TemporaryDirectory() as name:
        folder = problem.save(Path(name))
        rows = fresh.run(build_rows, folder).result
        # Peak memory is that of one solve in a process that does nothing else.
        alone = fresh.run(worker.solve_stored, folder, 1, MEMORY, limit)
        idle = fresh.run(worker.solve_stored, folder, 0, MEMORY, limit)
        timing = worker.median(fresh.run(worker.solve_stored, folder, REPEATS, MEMORY, limit).result)
    report.phases.append({"n": n, **timing.phases})
    return {
        "n": n,
        "m": problem.m,
        "removed": removed,
        "verdict": timing.outcome.verdict.name.lower(),
        "fill": timing.outcome.fill,
        "first solve s": alone.result[0].seconds,
        "median solve s": timing.seconds,
        "solve CPU s": timing.spent.cpu_seconds,
        "numpy rows s": rows.seconds,
        "numpy CPU s": rows.cpu_seconds,
        "solve / numpy": timing.seconds / rows.seconds,
        "ns / (n + m)": 1e9 * timing.seconds / (n + problem.m),
        "peak MiB": alone.peak_bytes / 2**20,
        "loaded MiB": idle.peak_bytes / 2**20,
    }


def _targets(rows: dict[int, Row]) -> list[Target]:
    large, middle = rows[1_000_000], rows[100_000]
    growth = large["median solve s"] / middle["median solve s"]
    return [
        Target("worker time at n = 10^6 over 10^5", "<=", 20, growth, "times"),
        Target("peak memory at n = 10^6", "<=", 2048, large["peak MiB"], "MiB"),
        Target("worker time over numpy at n = 10^6", "<=", 0.6, large["solve / numpy"], "times"),
    ]
