"""Calling every kernel of the exact search and of recognition once, so that nothing is left to compile."""

from collections.abc import Iterator
from itertools import product

import numpy as np

from nearchord_solve.budget import Budget
from nearchord_solve.fill.exact.blocks import solve_blocks
from nearchord_solve.fill.exact.core import Core
from nearchord_solve.fill.exact.greedy import coarse_portfolio
from nearchord_solve.fill.exact.kernels.reduce import add_safe_edges
from nearchord_solve.fill.exact.packing import disjoint
from nearchord_solve.fill.exact.subsets import solve_subsets
from nearchord_solve.fill.exact.whole import fill_of_graph
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.recognise import recognise_chordal, recognise_interval
from nearchord_solve.structure import Structure
from nearchord_solve.tree import build_structure

MANY = 1000


def rehearse() -> Iterator[None]:
    """The kernels that do not need the structure of a graph, one step at a time; each yields when it is done."""
    grid = _grid()
    core = Core.from_rows(grid.ptr, grid.adj)
    cells = Monitor().cells
    recognise_chordal(grid, Monitor())
    yield
    recognise_interval(Graph.from_edges(3, [(0, 1), (1, 2)]), Monitor())
    yield
    core.induced(np.arange(core.n - 1, dtype=np.int32))
    solve_subsets(core, MANY, cells)
    add_safe_edges(core.rows.copy(), core.sizes, cells)
    yield
    fill = coarse_portfolio(core, Monitor())
    assert fill is not None
    disjoint(core, fill, cells)
    yield
    solve_blocks(core, MANY, np.zeros((core.n, core.n), np.int64), 0, MANY, cells)
    yield


def rehearse_whole() -> None:
    """A search from the graph to its fill: compiles the way to the structure too, unless that is done."""
    grid = _grid()
    structure = build_structure(grid, Budget(), Monitor())
    assert isinstance(structure, Structure)
    fill_of_graph(grid, structure, None, Monitor())


def _grid() -> Graph:
    """Three by three vertices."""
    side = range(3)
    right = [(3 * i + j, 3 * i + j + 1) for i, j in product(side, range(2))]
    down = [(3 * i + j, 3 * i + j + 3) for i, j in product(range(2), side)]
    return Graph.from_edges(9, right + down)
