"""CP-SAT: constraint solving.

All constraints are in the linear relaxation (linearization_level 2), which proves in a second or two what its default
leaves open after a minute.
"""

from itertools import pairwise

import numpy as np
from ortools.sat.python import cp_model

from bench.clock import Watch
from bench.general.run import Run, columns_of
from bench.models import Model


def solve(model: Model, cuts: list[list[int]], threads: int, seconds: float) -> Run:
    """Solve the program with the cycles in ``cuts`` cut off."""
    building = Watch()
    program, column = _program(model, cuts)
    solver = cp_model.CpSolver()
    solver.parameters.num_workers = threads
    solver.parameters.linearization_level = 2
    solver.parameters.max_time_in_seconds = seconds
    built = building.read()
    solving = Watch()
    status = solver.solve(program)
    spent = solving.read()
    found = status in (cp_model.OPTIMAL, cp_model.FEASIBLE)
    return Run(
        status="optimal" if status == cp_model.OPTIMAL else f"time limit ({solver.status_name(status).lower()})",
        value=round(solver.objective_value) if found else None,
        bound=solver.best_objective_bound if found else None,
        build_seconds=built.seconds,
        spent=spent,
        chosen=columns_of(np.array([solver.value(x) for x in column])) if found else frozenset(),
    )


def _program(model: Model, cuts: list[list[int]]) -> tuple[cp_model.CpModel, list[cp_model.IntVar]]:
    program = cp_model.CpModel()
    column = [program.new_bool_var("") for _ in range(model.cost.size)]
    index, value = model.index.tolist(), model.value.tolist()
    bounds = zip(model.lower.tolist(), model.upper.tolist(), strict=True)
    for (begin, end), (lower, upper) in zip(pairwise(model.ptr.tolist()), bounds, strict=True):
        members, factors = [column[v] for v in index[begin:end]], value[begin:end]
        if (lower, upper) == (0, 1) and set(factors) == {1}:
            program.add_at_most_one(members)
        elif (lower, upper) == (1, 1) and set(factors) == {1}:
            program.add_exactly_one(members)
        else:
            program.add_linear_constraint(cp_model.LinearExpr.weighted_sum(members, factors), lower, upper)
    for cut in cuts:
        program.add_bool_or([column[v].negated() for v in cut])
    total = cp_model.LinearExpr.weighted_sum(column, model.cost.tolist())
    if model.maximise:
        program.maximize(total)
    else:
        program.minimize(total)
    return program, column
