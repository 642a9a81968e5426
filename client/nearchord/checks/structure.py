"""What can be confirmed of a structure report without a triangulation."""

from __future__ import annotations

import numpy as np

from nearchord.answer import Answer
from nearchord.checks.chordal import check_known
from nearchord.checks.classes import check_starts
from nearchord.checks.confirmed import Confirmed, Findings, check_sides, check_unanswered
from nearchord.checks.edges import Ints
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.wording import counted, named


def check_structure(graph: Graph, answer: Answer) -> Confirmed:
    """Confirms the number of components and that the fill cores agree with their figures; the fill range and the
    predictions rest on a triangulation that the answer does not carry. O((n + m) log n)."""
    if answer.value is None:
        return check_unanswered(answer)
    check_sides(answer)
    found = Findings()
    if answer.structure is not None:
        count = components(graph)
        if answer.structure.components != count:
            raise CheckFailed(f"the components are given as {answer.structure.components}, but there are {count}")
        found.confirm(f"the graph has {counted(count, 'connected component')}")
        _check_cores(graph, answer, answer.structure.largest_core, found)
        found.leave_open("the predictions: confirming them means computing them again")
    fill = f"{answer.value:,}" if answer.bound == answer.value else f"range {answer.bound:,} to {answer.value:,}"
    found.leave_open(f"the fill {fill}: ask the question fill for witnesses")
    return found.settle()


def _check_cores(graph: Graph, answer: Answer, largest: int, found: Findings) -> None:
    start, vertex = (answer.columns.get(f"core_{name}") for name in ("start", "vertex"))
    if start is None or vertex is None:
        return
    start, vertex = start.astype(np.int64), vertex.astype(np.int64)
    check_known(graph, vertex, "a fill core")
    check_starts(start, vertex.size, "fill cores")
    sizes = np.diff(start)
    if answer.fill_cores is not None and answer.fill_cores != sizes.size:
        raise CheckFailed(f"the fill cores are given as {answer.fill_cores}, but {named(sizes.size, 'fill core')}")
    most = int(sizes.max(initial=0))
    if largest != most:
        raise CheckFailed(f"the largest fill core is given as {largest}, but has {most} vertices")
    if sizes.size:
        found.confirm(f"{named(sizes.size, 'fill core')}, the largest with {largest:,} vertices")


def components(graph: Graph) -> int:
    """Number of connected components. Every vertex points to the least vertex known of its component; edges hand lesser
    ones on, and pointers are followed until they stand still, which takes O(log n) rounds of O(n + m) in practice."""
    u, v = graph.edges()
    least: Ints = np.arange(graph.n)
    while True:
        a, b = least[u], least[v]
        if bool((a == b).all()):
            return int((least == np.arange(graph.n)).sum())
        np.minimum.at(least, np.maximum(a, b), np.minimum(a, b))
        while bool((least[least] != least).any()):
            least = least[least]
