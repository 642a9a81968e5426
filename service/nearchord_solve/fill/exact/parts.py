"""The parts of a graph that hold fill, as graphs of their own."""

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.cores import Cores
from nearchord_solve.fill.exact.kernels.parts import cut_out, part_places
from nearchord_solve.graph import Graph
from nearchord_solve.kernels.layout import Numbering


class Part(NamedTuple):
    """``vertices`` int32[k] of the graph, ascending; symmetric rows ``ptr`` int64[k+1], ``adj`` int32 among them."""

    vertices: I32
    ptr: I64
    adj: I32


def parts_of(graph: Graph, numbering: Numbering, cores: Cores) -> Iterator[Part]:
    """Each part with fill, core by core.  O(n) memory, time linear in the rows of the parts' vertices."""
    index = np.full(graph.n, -1, np.int32)
    nb = numbering
    for begin, end in zip(cores.ptr[:-1].tolist(), cores.ptr[1:].tolist(), strict=True):
        places = part_places(nb.low_ptr, nb.low, nb.fill_end, nb.fill, cores.place[begin:end])
        vertices = np.sort(nb.order[places])
        yield Part(vertices, *cut_out(graph.ptr, graph.adj, vertices, index))
