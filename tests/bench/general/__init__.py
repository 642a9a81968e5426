"""0-1 programs by general-purpose solvers.

All get the same program (:mod:`bench.models`).  Building the model and solving it are timed apart.  Each must prove
its optimum (no gap allowed).  Where cycles have to be cut off, a program is solved, the cycles in its choice are cut
off, and it is solved again until there are none; the seconds add up, and what a cut program proves is a bound.

Settings are the best found by trial on time windows with n = 5,000 and 20,000.  A solver is imported when it is run.
"""

from dataclasses import replace
from importlib import import_module

from bench import cycles
from bench.clock import Spent
from bench.cycles import Neighbours
from bench.general.run import Run
from bench.models import Model

MODULES = {"HiGHS": "highs", "CP-SAT": "cp_sat"}
NAMES = tuple(MODULES)

__all__ = ["NAMES", "Run", "run"]


def run(solver: str, model: Model, threads: int, seconds: float, near: Neighbours | None = None) -> Run:
    """Run the solver of that name (one of NAMES) with so many threads, for at most so many seconds.

    ``near``: adjacent vertices of each vertex, for models that want cycles cut off.
    """
    solve = import_module(f"bench.general.{MODULES[solver]}").solve
    cuts: list[list[int]] = []
    done: Run = solve(model, cuts, threads, seconds)
    while near is not None and model.cuts and done.proven:
        closed = cycles.closed(near, {v for v in done.chosen if v < model.cuts})
        if not closed:
            return done
        cuts += closed
        left = seconds - done.seconds
        if left <= 0:
            break
        again = solve(model, cuts, threads, left)
        done = replace(
            again,
            build_seconds=done.build_seconds + again.build_seconds,
            spent=Spent(done.seconds + again.seconds, done.spent.cpu_seconds + again.spent.cpu_seconds),
        )
    if near is not None and model.cuts and cycles.closed(near, {v for v in done.chosen if v < model.cuts}):
        return replace(done, status="time limit (cycles left)", value=None)
    return done
