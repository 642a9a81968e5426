"""Which classes a graph belongs to, with what confirms it."""

import numpy as np

from nearchord_solve.arrays import I64, U32
from nearchord_solve.graph import Graph
from nearchord_solve.monitor import Monitor
from nearchord_solve.outcome import Recognition
from nearchord_solve.recognise import find_chordless, recognise_interval, recognise_split
from nearchord_solve.structure import Structure

Columns = dict[str, U32 | I64]


def recognise(graph: Graph, structure: Structure, monitor: Monitor) -> tuple[Recognition, Columns]:
    """Chordal, interval and split; what a stop leaves open is None, and has no column.

    An interval graph is chordal.  O(n log n + m), and for graphs that are not chordal the search of one part.
    """
    columns: Columns = {}
    chordal = structure.numbering.fill.size == 0
    interval: bool | None = None if chordal else False
    if chordal:
        found = recognise_interval(graph, monitor)
        interval = None if found is None else found.interval
        if found is not None and found.ptr is not None and found.vertex is not None:
            columns |= {"clique_start": found.ptr, "clique_vertex": found.vertex.astype(np.uint32)}
    else:
        witness = find_chordless(graph, structure.numbering, structure.cores, monitor)
        if witness is not None and witness.cycle is not None:
            columns["chordless_cycle"] = witness.cycle.astype(np.uint32)
    split = recognise_split(graph)
    if split.clique is not None:
        columns["split_clique"] = split.clique.astype(np.uint32)
    return Recognition(chordal, interval, split.split, split.splittance), columns
