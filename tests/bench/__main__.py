"""The benchmark: ``bash tests/bench/run.sh [SCENARIO ...] [--quick] [--profile] [--seconds S] [--out DIR]``.

Prints tables with ratios taken within one run, and writes one JSON file a scenario.  It is no test: no promise
that fails to hold changes its exit code.
"""

import argparse
from pathlib import Path

from rich.console import Console

from bench import machine
from bench.options import Options
from bench.scenarios import SCENARIOS

PIPED_WIDTH = 120  # columns of a table that no terminal limits
RESULTS = Path(__file__).resolve().parent / "results"


def main() -> None:
    """Run the scenarios asked for, one after the other."""
    parser = _parser()
    arguments = parser.parse_args()
    if unknown := set(arguments.scenario) - set(SCENARIOS):
        parser.error(f"unknown scenario {', '.join(sorted(unknown))}; known: {', '.join(SCENARIOS)}")
    console = Console()
    if not console.is_terminal:
        console = Console(width=PIPED_WIDTH)
    options = Options(
        out=arguments.out / "quick" if arguments.quick else arguments.out,
        quick=arguments.quick,
        seconds=arguments.seconds,
        general=not arguments.own,
        threads=tuple(arguments.threads or sorted({1, machine.cores()})),
        seed=arguments.seed,
    )
    for name in arguments.scenario or SCENARIOS:
        report = SCENARIOS[name](options)
        report.show(console, profile=arguments.profile)
        console.print(f"written to {report.write(options.out)}\n")


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="tests/bench/run.sh", description="Measures nearchord; prints ratios.")
    parser.add_argument("scenario", nargs="*", help=f"all by default: {', '.join(SCENARIOS)}")
    parser.add_argument("--quick", action="store_true", help="small sizes, to see that everything runs")
    parser.add_argument("--profile", action="store_true", help="print seconds by phase of the solver too")
    parser.add_argument("--own", action="store_true", help="leave the general-purpose solvers out")
    parser.add_argument("--seconds", type=float, help="limit of every single solver run")
    parser.add_argument("--threads", type=int, nargs="+", help="thread counts of the general solvers: 1 and all cores")
    parser.add_argument("--seed", type=int, default=1, help="seed of the generators (1)")
    parser.add_argument("--out", type=Path, default=RESULTS, help="folder for JSON and pictures (%(default)s)")
    return parser


if __name__ == "__main__":
    main()
