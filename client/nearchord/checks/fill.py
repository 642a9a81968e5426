"""Fill edges, the classes of a graph, and how many fill edges it needs at least, all from their witnesses."""

from __future__ import annotations

import numpy as np

from nearchord.answer import Answer, Recognition
from nearchord.checks.branches import Branches
from nearchord.checks.chordal import check_chordless_cycle, check_elimination_order, check_known, pair_label
from nearchord.checks.classes import check_cliques, check_split, splittance
from nearchord.checks.confirmed import Confirmed, Findings, check_sides, check_unanswered
from nearchord.checks.edges import Edges, Ints
from nearchord.checks.packing import Packing, TooLarge
from nearchord.errors import CheckFailed
from nearchord.graph import Graph
from nearchord.stages import ProofKind, Verdict
from nearchord.wording import counted, named

WITNESSED = (Verdict.PROVEN, Verdict.BOUNDED, Verdict.OVER_FILL)
"""Verdicts under which an answer says something about the graph."""


def check_fill(graph: Graph, answer: Answer) -> Confirmed:
    """Confirms from the columns of an answer that its fill edges make the graph chordal, its classes, and its bound.

    What has no witness is named as not confirmed. O((n + m + k) log m) for k fill edges, and the packing's time.
    """
    if answer.verdict not in WITNESSED:
        return check_unanswered(answer)
    return _FillCheck(graph, answer).run()


class _FillCheck:
    """One answer on its way through the checks."""

    def __init__(self, graph: Graph, answer: Answer) -> None:
        self._graph, self._answer = graph, answer
        self._edges = Edges(graph.n, *graph.edges())
        self._found = Findings()

    def run(self) -> Confirmed:
        if self._answer.chosen.size:
            raise CheckFailed(f"{self._answer.chosen.size} vertices are chosen, but the question chooses none")
        if self._answer.value is not None:
            self._check_sides()
            self._check_fill_edges()
        elif self._answer.verdict is Verdict.PROVEN:
            raise CheckFailed("the verdict is PROVEN, but there is no value")
        elif self._answer.verdict is Verdict.BOUNDED:
            self._found.leave_open("how the graph becomes chordal: the answer names no fill edges")
        if self._answer.recognition is not None:
            self._check_classes(self._answer.recognition)
        self._check_bound()
        return self._found.settle()

    def _check_sides(self) -> None:
        """OVER_FILL has a bound above its budget; how far the fill edges found are above it is not asked."""
        check_sides(self._answer)
        for field, value in (("fill", self._answer.value), ("fill_lower_bound", self._answer.bound)):
            stated = getattr(self._answer, field)
            if stated is not None and stated != value:
                raise CheckFailed(f"{field} is {stated}, but the {'value' if field == 'fill' else 'bound'} is {value}")

    def _column(self, name: str) -> Ints | None:
        column = self._answer.columns.get(name)
        return None if column is None else column.astype(np.int64)

    def _check_fill_edges(self) -> None:
        u, v = self._answer.fill_edges.astype(np.int64).T
        if len(u) != self._answer.value:
            raise CheckFailed(f"the value is given as {self._answer.value}, but {named(len(u), 'fill edge')}")
        self._check_pairs(u, v)
        order = self._column("elimination_order")
        if order is None:
            self._found.leave_open("that the fill edges make the graph chordal: the answer has no elimination order")
            return
        check_elimination_order(self._graph, self._edges.with_pairs(u, v), order)
        self._found.confirm(
            f"adding the {counted(len(u), 'fill edge')} makes the graph chordal"
            if len(u)
            else "the graph needs no fill edge"
        )

    def _check_pairs(self, u: Ints, v: Ints) -> None:
        """Fill edges are pairs without an edge, smaller end first, ascending, each once."""
        check_known(self._graph, np.concatenate((u, v)), "a fill edge")
        joined = np.flatnonzero(self._edges.joined(u, v))
        if joined.size:
            raise CheckFailed(f"the fill edge {self._pair(u, v, joined[0])} is an edge of the graph")
        wrong = np.concatenate(([False], (u[1:] < u[:-1]) | ((u[1:] == u[:-1]) & (v[1:] <= v[:-1]))))[: len(u)]
        disorder = np.flatnonzero((u >= v) | wrong)
        if disorder.size:
            raise CheckFailed(f"the fill edges do not ascend at {self._pair(u, v, disorder[0])}")

    def _pair(self, u: Ints, v: Ints, at: int) -> str:
        return pair_label(self._graph, int(u[at]), int(v[at]))

    def _check_classes(self, classes: Recognition) -> None:
        if classes.chordal is False and (classes.interval or classes.split):
            raise CheckFailed("the graph is said to be interval or split, but not chordal; both are always chordal")
        chordless = self._check_chordal(classes.chordal)
        self._check_interval(classes.interval, chordless)
        self._check_splittance(classes)

    def _check_chordal(self, chordal: bool | None) -> bool:
        """Returns whether a chordless cycle was confirmed."""
        cycle = self._column("chordless_cycle")
        if cycle is not None and cycle.size:
            check_chordless_cycle(self._graph, self._edges, cycle)
            if chordal:
                raise CheckFailed("the graph is said to be chordal, but a chordless cycle is named")
            self._found.confirm(f"the graph is not chordal: a cycle on {cycle.size} vertices has no chord")
            return True
        order = self._column("elimination_order")
        if chordal and order is not None:
            check_elimination_order(self._graph, self._edges, order)
            self._found.confirm("the graph is chordal: the later neighbours of every vertex are adjacent to each other")
        elif chordal is not None:
            self._found.leave_open(f"that the graph is {'' if chordal else 'not '}chordal: the answer has no witness")
        return False

    def _check_interval(self, interval: bool | None, chordless: bool) -> None:
        start, vertex = self._column("clique_start"), self._column("clique_vertex")
        if interval and start is not None and vertex is not None:
            check_cliques(self._graph, self._edges, start, vertex)
            self._found.confirm("the graph is interval: each vertex lies in consecutive ones of all maximal cliques")
        elif interval is False and chordless:
            self._found.confirm("the graph is not interval, because it is not chordal")
        elif interval is not None:
            self._found.leave_open(f"that the graph is {'' if interval else 'not '}interval: the answer has no witness")

    def _check_splittance(self, classes: Recognition) -> None:
        least = splittance(self._edges)
        if classes.splittance is not None and classes.splittance != least:
            raise CheckFailed(f"the splittance is given as {classes.splittance}, but the degrees make it {least}")
        if classes.split is not None and classes.split is not (least == 0):
            said = "split" if classes.split else "not split"
            raise CheckFailed(f"the graph is said to be {said}, but its splittance is {least}")
        clique = self._column("split_clique")
        if classes.split and clique is not None:
            check_split(self._graph, self._edges, clique)
        if classes.split is not None:
            self._found.confirm(f"the graph is {'' if classes.split else 'not '}split: its splittance is {least:,}")

    def _check_bound(self) -> None:
        bound, budget = self._answer.bound, self._answer.provenance.budget.fill
        if self._answer.verdict is Verdict.OVER_FILL and (bound is None or budget is None or bound <= budget):
            raise CheckFailed(f"the verdict is OVER_FILL, but the bound {bound} is not above the budget {budget}")
        if bound is None or bound <= 0:
            return
        packing = Packing(self._graph, self._answer.columns)
        trees = Branches(self._graph, self._answer.columns)
        by = _means(len(trees))
        try:
            packed, pairs = packing.bound_beside(self._edges, trees.vertices())
            proven = packed + trees.bound(self._edges, pairs)
        except TooLarge:
            self._found.leave_open(f"the bound {bound:,}: {by} is too large to be checked here")
            return
        if proven >= bound:
            self._found.confirm(
                f"the bound {bound:,}: rings of {by} need {'as many fill edges' if bound > 1 else 'a fill edge'}"
            )
            return
        witnessed = {ProofKind.PACKING, ProofKind.NONE, *([ProofKind.BRANCH] if len(trees) else [])}
        others = sorted(set(self._answer.proof_kinds) - witnessed)
        rest = f"rests on {' and '.join(others)}" if others else "has no witness in the answer"
        self._found.leave_open(f"the bound {bound:,}: {by} proves {proven:,} of it, what is missing {rest}")


def _means(trees: int) -> str:
    """What a bound is worked out from, in words."""
    if not trees:
        return "the packing"
    return f"the packing with {counted(trees, 'tree')} of cases"
