"""Exact fill: time windows with cleared pairs, named graphs, and the real graphs whose least fill is listed.

One process for all, after its warm-up; each run is limited.  The listed values come from cutting planes or from two
general-purpose methods, before this project; "at most" marks the best that was found then.
"""

import nearchord
import nearchord_solve as ns
import networkx as nx
import numpy as np

from bench import fresh, worker
from bench.options import Options
from bench.problem import Problem, windows
from bench.report import Report, Row, Target
from bench.scenarios.data import FOLDER, as_problem

MEMORY = 2**31
SECONDS = 120.0
WINDOWS = ((10_000, 500), (10_000, 3_000), (100_000, 300), (1_000_000, 1_000))
QUICK_WINDOWS = ((1_000, 20),)
NAMED = {
    "4x4 grid": (nx.grid_2d_graph(4, 4), 18),
    "4x5 grid": (nx.grid_2d_graph(4, 5), 25),
    "3x8 grid": (nx.grid_2d_graph(3, 8), 25),
    "Petersen": (nx.petersen_graph(), 12),
    "Q4": (nx.hypercube_graph(4), 27),
    "icosahedron": (nx.icosahedral_graph(), 19),
    "dodecahedron": (nx.dodecahedral_graph(), 39),
    "Mycielski 4": (nx.mycielski_graph(5), 46),
}
LISTED = {"huck": 5, "jean": 16, "anna": 47, "miles250": 53, "zeroin.i.1": 218, "fpsol2.i.1": 204, "queen5_5": 93}
AT_MOST = {"david": 64, "mulsol.i.1": 142}


def measure(options: Options) -> Report:
    """Run the scenario; without the folder of real graphs those are left out."""
    limit = options.seconds or (10.0 if options.quick else SECONDS)
    cases = list(_windows(options)) + list(_named())
    if (FOLDER / "graphs").is_dir():
        cases += list(_real(options))
    report = Report("fill", {"limit_seconds": limit, "seed": options.seed})
    timings = fresh.run(fill_all, [problem for _, problem, _, _ in cases], limit).result
    rows = [_row(name, problem, listed, at_most, timing) for (name, problem, listed, at_most), timing in
            zip(cases, timings, strict=True)]  # fmt: skip
    report.tables["fewest fill edges"] = rows
    report.phases = [{"graph": row["graph"], **timing.phases} for row, timing in zip(rows, timings, strict=True)]
    if not options.quick:
        report.targets = _targets(rows)
    return report


def fill_all(problems: list[Problem], limit: float) -> list[worker.Timing]:
    """Ask for the fill of each, after the warm-up."""
    worker.warm_up()
    return [worker.solve(problem, ns.Budget(memory=MEMORY), limit, ns.Fill()) for problem in problems]


Case = tuple[str, Problem, int | None, int | None]


def _windows(options: Options) -> list[Case]:
    sizes = QUICK_WINDOWS if options.quick else WINDOWS
    return [(f"windows -{removed:,}", windows(n, 20, removed, options.seed), None, removed) for n, removed in sizes]


def _named() -> list[Case]:
    cases: list[Case] = []
    for name, (graph, listed) in NAMED.items():
        plain = nx.convert_node_labels_to_integers(graph)
        pairs = np.array(sorted((min(e), max(e)) for e in plain.edges), np.uint32)
        ones = np.ones(plain.number_of_nodes(), np.int64)
        cases.append((name, Problem(ones.size, pairs[:, 0].copy(), pairs[:, 1].copy(), ones), listed, None))
    return cases


def _real(options: Options) -> list[Case]:
    names = [name for name in (*LISTED, *AT_MOST) if (FOLDER / "graphs" / f"{name}.col").exists()]
    return [
        (name, _read(name).shuffled(options.seed), LISTED.get(name), AT_MOST.get(name))
        for name in names[: 2 if options.quick else None]
    ]


def _read(name: str) -> Problem:
    return as_problem(nearchord.Graph.read(FOLDER / "graphs" / f"{name}.col"))


def _row(name: str, problem: Problem, listed: int | None, at_most: int | None, timing: worker.Timing) -> Row:
    outcome = timing.outcome
    agrees = (listed is None or outcome.bound <= listed <= outcome.value) and (
        at_most is None or outcome.bound <= at_most
    )
    kinds = outcome.proof_kinds
    return {
        "graph": name,
        "n": problem.n,
        "m": problem.m,
        "listed": listed,
        "at most": at_most,
        "bound": outcome.bound,
        "fill": outcome.value,
        "verdict": outcome.verdict.name,
        "cores by proof": ", ".join(f"{kinds.count(kind):,} {kind}" for kind in sorted(set(kinds))),
        "agrees": "yes" if agrees else "NO",
        "seconds": timing.seconds,
    }


def _targets(rows: list[Row]) -> list[Target]:
    def slowest(chosen: list[Row]) -> float:
        return max((row["seconds"] if row["verdict"] == "PROVEN" else float("inf") for row in chosen), default=0.0)

    listed = [row for row in rows if row["listed"] is not None]
    return [
        Target("windows, n = 10^4, 500 removed: all cores proven", "<=", 60, slowest(rows[:1])),
        Target("slowest graph with a listed value, proven", "<=", 120, slowest(listed)),
        Target("listed values missed", "<=", 0, sum(row["agrees"] == "NO" for row in rows), "graphs"),
    ]
