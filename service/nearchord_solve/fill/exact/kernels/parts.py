"""Cutting a part out of the graph."""

import numpy as np

from nearchord_solve.kernels.compiled import I32, I64, kernel


@kernel
def part_places(low_ptr: I64, low: I32, fill_end: I64, fill: I32, places: I32) -> I32:
    """Places of a part: those of its core, ascending in ``places``, and those above that the first is joined to."""
    top = places[0]
    own = low_ptr[top + 1] - low_ptr[top]
    added = fill_end[top] - fill_end[top + 1]
    found = np.empty(own + added + places.shape[0], np.int32)
    found[:own] = low[low_ptr[top] : low_ptr[top + 1]]
    found[own : own + added] = fill[fill_end[top + 1] : fill_end[top]]
    found[own + added :] = places
    return found


@kernel
def cut_out(ptr: I64, adj: I32, vertices: I32, index: I32) -> tuple[I64, I32]:
    """Symmetric rows of the subgraph on ``vertices``, ascending, in their order.

    ``index`` int32[n] must be -1 everywhere and is so again afterwards.  O(sum of the degrees).
    """
    size = np.int64(0)
    for i in range(vertices.shape[0]):
        index[vertices[i]] = i
        size += ptr[vertices[i] + 1] - ptr[vertices[i]]
    part_ptr = np.zeros(vertices.shape[0] + 1, np.int64)
    part_adj = np.empty(size, np.int32)
    at = 0
    for i in range(vertices.shape[0]):
        for e in range(ptr[vertices[i]], ptr[vertices[i] + 1]):
            if index[adj[e]] >= 0:
                part_adj[at] = index[adj[e]]
                at += 1
        part_ptr[i + 1] = at
    for i in range(vertices.shape[0]):
        index[vertices[i]] = -1
    return part_ptr, part_adj[:at].copy()
