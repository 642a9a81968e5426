"""Heaviest independent set by general-purpose solvers: HiGHS (branch and cut) and CP-SAT (constraint solving).

Both get the same groups of vertices of which at most one may be chosen: edges, or maximal cliques.  Building
the model and solving it are timed apart.  Each must prove its optimum (no gap allowed).

Settings are the best found by trial on time windows with n = 5,000 and 20,000.  HiGHS: presolve on, otherwise its
defaults.  CP-SAT: all constraints in the linear relaxation (linearization_level 2), which proves in a second or
two what its default leaves open after a minute.
"""

from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

import highspy
import numpy as np
from numpy.typing import NDArray
from ortools.sat.python import cp_model

from bench.cliques import Groups
from bench.clock import Spent, Watch

NAMES = ("HiGHS", "CP-SAT")


@dataclass(frozen=True)
class Run:
    """One run: ``value`` of the best choice found and ``bound`` above it, None if there is none."""

    status: str
    value: int | None
    bound: float | None
    build_seconds: float
    spent: Spent

    @property
    def seconds(self) -> float:
        """Seconds by the wall, without building the model."""
        return self.spent.seconds

    @property
    def proven(self) -> bool:
        """Whether the solver says that its value is optimal."""
        return self.status == "optimal"


def run_stored(solver: str, folder: Path, formulation: str, threads: int, seconds: float) -> Run:
    """Run ``solver`` on groups and weights that store() wrote; made to be called in a fresh process."""
    ptr, index, weights = (np.load(folder / f"{formulation}-{name}.npy") for name in ("ptr", "index", "weights"))
    return run(solver, weights, Groups(ptr, index), threads, seconds)


def store(folder: Path, formulation: str, weights: NDArray[np.int64], groups: Groups) -> None:
    """Write groups and weights for run_stored()."""
    for name, array in (("ptr", groups.ptr), ("index", groups.index), ("weights", weights)):
        np.save(folder / f"{formulation}-{name}.npy", array)


def run(solver: str, weights: NDArray[np.int64], groups: Groups, threads: int, seconds: float) -> Run:
    """Run the solver of that name (one of NAMES) with so many threads, for at most so many seconds."""
    return {"HiGHS": _highs, "CP-SAT": _cp_sat}[solver](weights, groups, threads, seconds)


def _highs(weights: NDArray[np.int64], groups: Groups, threads: int, seconds: float) -> Run:
    building = Watch()
    highs = _highs_model(weights, groups)
    # All values are whole numbers, so a gap below one proves the optimum.
    for option, setting in (("presolve", "on"), ("mip_rel_gap", 0.0), ("mip_abs_gap", 0.99), ("time_limit", seconds)):
        highs.setOptionValue(option, setting)
    highs.resetGlobalScheduler(True)  # or the thread count of an earlier run in this process stays
    highs.setOptionValue("threads", threads)
    highs.setOptionValue("parallel", "on" if threads > 1 else "off")
    built = building.read()
    solving = Watch()
    highs.run()
    spent = solving.read()
    status, info = highs.getModelStatus(), highs.getInfo()
    feasible = info.primal_solution_status == highspy.SolutionStatus.kSolutionStatusFeasible
    return Run(
        status="optimal" if status == highspy.HighsModelStatus.kOptimal else highs.modelStatusToString(status).lower(),
        value=round(info.objective_function_value) if feasible else None,
        bound=info.mip_dual_bound if np.isfinite(info.mip_dual_bound) else None,
        build_seconds=built.seconds,
        spent=spent,
    )


def _highs_model(weights: NDArray[np.int64], groups: Groups) -> highspy.Highs:
    highs = highspy.Highs()  # type: ignore[no-untyped-call]
    highs.setOptionValue("output_flag", False)
    lp = highspy.HighsLp()
    lp.num_col_, lp.num_row_ = weights.size, groups.count
    lp.sense_ = highspy.ObjSense.kMaximize
    lp.col_cost_ = weights.astype(np.float64)
    lp.col_lower_, lp.col_upper_ = np.zeros(weights.size), np.ones(weights.size)
    lp.row_lower_, lp.row_upper_ = np.full(groups.count, -highspy.kHighsInf), np.ones(groups.count)
    lp.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    lp.a_matrix_.start_, lp.a_matrix_.index_ = groups.ptr, groups.index
    lp.a_matrix_.value_ = np.ones(groups.index.size)
    lp.integrality_ = [highspy.HighsVarType.kInteger] * weights.size
    highs.passModel(lp)
    return highs


def _cp_sat(weights: NDArray[np.int64], groups: Groups, threads: int, seconds: float) -> Run:
    building = Watch()
    model = _cp_sat_model(weights, groups)
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = threads
    solver.parameters.linearization_level = 2
    solver.parameters.max_time_in_seconds = seconds
    built = building.read()
    solving = Watch()
    status = solver.solve(model)
    spent = solving.read()
    found = status in (cp_model.OPTIMAL, cp_model.FEASIBLE)
    return Run(
        status="optimal" if status == cp_model.OPTIMAL else f"time limit ({solver.status_name(status).lower()})",
        value=round(solver.objective_value) if found else None,
        bound=solver.best_objective_bound if found else None,
        build_seconds=built.seconds,
        spent=spent,
    )


def _cp_sat_model(weights: NDArray[np.int64], groups: Groups) -> cp_model.CpModel:
    model = cp_model.CpModel()
    chosen = [model.new_bool_var("") for _ in range(weights.size)]
    bounds, index = groups.ptr.tolist(), groups.index.tolist()
    for begin, end in pairwise(bounds):
        model.add_at_most_one([chosen[v] for v in index[begin:end]])
    model.maximize(cp_model.LinearExpr.weighted_sum(chosen, weights.tolist()))
    return model
