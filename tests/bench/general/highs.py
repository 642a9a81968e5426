"""HiGHS: branch and cut.  Presolve on, otherwise its defaults."""

import highspy
import numpy as np

from bench.clock import Watch
from bench.general.run import Run, columns_of
from bench.models import Model


def solve(model: Model, cuts: list[list[int]], threads: int, seconds: float) -> Run:
    """Solve the program with the cycles in ``cuts`` cut off."""
    building = Watch()
    highs = _program(model, cuts)
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
        chosen=columns_of(np.array(highs.getSolution().col_value)) if feasible else frozenset(),
    )


def _program(model: Model, cuts: list[list[int]]) -> highspy.Highs:
    highs = highspy.Highs()  # type: ignore[no-untyped-call]
    highs.setOptionValue("output_flag", False)
    sizes = np.array([len(cut) for cut in cuts], np.int64)
    inside = np.array([v for cut in cuts for v in cut], np.int64)
    lp = highspy.HighsLp()
    lp.num_col_, lp.num_row_ = model.cost.size, model.rows + len(cuts)
    lp.sense_ = highspy.ObjSense.kMaximize if model.maximise else highspy.ObjSense.kMinimize
    lp.col_cost_ = model.cost.astype(np.float64)
    lp.col_lower_, lp.col_upper_ = np.zeros(model.cost.size), np.ones(model.cost.size)
    lp.row_lower_ = np.concatenate((model.lower, np.zeros(len(cuts)))).astype(np.float64)
    lp.row_upper_ = np.concatenate((model.upper, sizes - 1)).astype(np.float64)
    lp.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
    lp.a_matrix_.start_ = np.concatenate((model.ptr, model.ptr[-1] + np.cumsum(sizes))).astype(np.int32)
    lp.a_matrix_.index_ = np.concatenate((model.index, inside)).astype(np.int32)
    lp.a_matrix_.value_ = np.concatenate((model.value, np.ones(inside.size))).astype(np.float64)
    lp.integrality_ = [highspy.HighsVarType.kInteger] * model.cost.size
    highs.passModel(lp)
    return highs
