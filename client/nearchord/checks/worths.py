"""What hangs from a clique is worth: bags without fill, for choices that take at most q vertices of a clique.

With q colours, and for forests with q = 2, no more than q vertices of a clique are chosen, and which ones says all: in
a clique every chosen vertex has a colour of its own, and two chosen vertices of a clique are joined, so that nothing
else may connect them. What a choice S of a bag gets from below through a clique is a function f(S) of at most q
vertices.

*Form.* f is kept as an array with q axes over "nothing" (index 0) and the vertices of the bag (from 1): at
(x1, ..., xq) it has f of the vertices among them. Cells with a vertex twice mean nothing and are never used for others.
Such an array of *values* turns into one of *worths* by subtracting, axis after axis, what stands at "nothing"; adding
it turns it back. A worth belongs to exactly its vertices: f(S) is the sum of the worths of all subsets of S (inclusion
and exclusion). Hence worths of a bag below are simply added to the cells of the same vertices in the bag above, however
many hang there; and a set S with more than q vertices, in a bag with fill, gets the worths of all its subsets as well,
since each function that went into them looks at one clique only, with at most q vertices of S.

*Eliminating* the last vertex v turns values f on K into values g on K without v: g(S) = max(f(S), f(S + v)) for less
than q vertices S, and g(S) = f(S) for q, which leave no room for v.
"""

from __future__ import annotations

import numpy as np

from nearchord.checks.edges import Ints


def no_worths(size: int, q: int) -> Ints:
    """Worths of a bag of so many vertices from which nothing hangs: int64[size + 1] on each of q axes."""
    return np.zeros((size + 1,) * q, np.int64)


def weigh(worths: Ints, position: int, weight: int) -> None:
    """Add to what the vertex at a position is worth alone; `worths` is overwritten."""
    for axis in range(worths.ndim):
        worths[(0,) * axis + (position + 1,) + (0,) * (worths.ndim - axis - 1)] += weight


def to_values(worths: Ints) -> None:
    """Worths become values, in place. O(q size^q)."""
    for axis in range(worths.ndim):
        along = worths.swapaxes(axis, 0)
        along[1:] += along[0]


def to_worths(values: Ints) -> None:
    """Values become worths, in place. O(q size^q)."""
    for axis in range(values.ndim):
        along = values.swapaxes(axis, 0)
        along[1:] -= along[0]


def eliminate(values: Ints, left: int) -> Ints:
    """Values on the first `left` vertices once the others have gone, the last first; overwrites `values`."""
    for last in range(values.shape[0] - 1, left, -1):
        with_it = values[(slice(0, last),) * (values.ndim - 1) + (last,)]
        values = values[(slice(0, last),) * values.ndim]
        for axis in range(values.ndim):
            without = values.swapaxes(axis, 0)[0]
            np.maximum(without, with_it, out=without)
    return values


def add_from_below(worths: Ints, below: Ints, where: Ints) -> None:
    """Add the worths of an adhesion, whose vertices stand at the positions `where` of the bag above, in place."""
    index = np.concatenate((np.zeros(1, np.int64), where + 1))
    if worths.ndim == 2:
        worths[index[:, None], index] += below
    else:
        worths[np.ix_(*(index,) * worths.ndim)] += below


def spread(values: Ints) -> None:
    """Give each cell what stands where its indices ascend, in place."""
    if values.size > 1:
        values[...] = values[tuple(np.sort(np.indices(values.shape), axis=0))]


def rows_of_worths(worths: Ints) -> list[dict[int, int]]:
    """By position, and by the set of earlier positions as bits: what the vertex is worth together with exactly these.

    Only worths other than 0; the empty set always.
    """
    rows: list[dict[int, int]] = [{0: 0} for _ in range(worths.shape[0] - 1)]
    cells = np.argwhere(worths)
    if cells.size:
        ascending = ((cells[:, 1:] > cells[:, :-1]) | (cells[:, :-1] == 0)).all(axis=1) & (cells[:, -1] > 0)
        cells = cells[ascending]
    found = worths[tuple(cells.T)].tolist() if cells.size else []
    for cell, worth in zip(cells.tolist(), found, strict=True):
        rows[cell[-1] - 1][sum(1 << (x - 1) for x in cell[:-1] if x)] = worth
    return rows
