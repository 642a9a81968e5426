"""Answers with certificates, straight from the solver, and faults put into them."""

from __future__ import annotations

import hashlib
import random
from dataclasses import fields, replace
from typing import Any

import nearchord
import nearchord_solve as ns
import numpy as np
from nearchord.stages import WhenOver

Columns = dict[str, np.ndarray]


def answered(
    graph: nearchord.Graph, question: nearchord.Question | None = None, budget: ns.Budget | None = None
) -> nearchord.Answer:
    """What the solver says, as a session would give it; pins are vertex numbers."""
    question = question or nearchord.IndependentSet()
    kind = ns.QUESTIONS[question.name]
    values = {"scenarios": question.scenario_count}
    asked = kind(**{field.name: values.get(field.name, getattr(question, field.name, 0)) for field in fields(kind)})
    u, v = graph.edges()
    pairs = list(zip(u.tolist(), v.tolist(), strict=True))
    given = graph.weights if question.vectors is None else question.vectors
    weights = None if given is None else given.astype(np.int64)
    outcome = ns.solve(
        asked, ns.Graph.from_edges(graph.n, pairs), weights, budget or ns.Budget(), "bound", ns.Monitor()
    )
    return answer_of(graph, question, outcome)


def answer_of(graph: nearchord.Graph, question: nearchord.Question, outcome: ns.Outcome) -> nearchord.Answer:
    """An outcome about a graph, with its weights, as the answer that a session would give."""
    weights = graph.weights
    address = "" if weights is None else hashlib.sha256(weights.astype("<i8").tobytes()).hexdigest()
    origin = nearchord.Provenance(
        graph.address, address, "1", 1, nearchord.Budget(), WhenOver.BOUND, 1, (), 0.0, 0.0, 0, None
    )
    return nearchord.Answer(
        "j", 0, "", question, nearchord.Verdict(outcome.verdict.value), outcome.value, outcome.bound,
        outcome.chosen, outcome.reason, outcome.fill, outcome.fill_lower_bound, outcome.states, outcome.bags,
        outcome.largest_bag, outcome.parts, outcome.fill_cores, nearchord.ProofKind(outcome.proof),
        tuple(map(nearchord.ProofKind, outcome.proof_kinds)), 0.0, graph.n, "", origin, outcome.columns,
        count=getattr(outcome, "count", None),
    )  # fmt: skip


def confirmed(graph: nearchord.Graph, answer: nearchord.Answer) -> bool:
    """Whether everything is confirmed, the bound included; CheckFailed counts as no."""
    return verdict_on(graph, answer) == "confirmed"


def verdict_on(graph: nearchord.Graph, answer: nearchord.Answer) -> str:
    """How a check ends: confirmed, open, or refused; anything but CheckFailed is a defect and passes through."""
    try:
        return "open" if nearchord.check(graph, answer).not_confirmed else "confirmed"
    except nearchord.CheckFailed:
        return "refused"


def nothing_chosen(answer: nearchord.Answer, bound: int, **columns: Any) -> nearchord.Answer:
    """An answer that chooses nothing, so that its bound can be as low as one likes."""
    empty = {"chosen": np.zeros(0, np.uint32), "value": 0}
    bare = {name: column for name, column in answer.columns.items() if name != "colour"}
    return bounded(replace(answer, columns=bare, **empty), bound, **columns)


def bounded(answer: nearchord.Answer, bound: int, **columns: Any) -> nearchord.Answer:
    """The same choice with another bound and other columns."""
    return replace(answer, verdict=nearchord.Verdict.BOUNDED, bound=bound, columns={**answer.columns, **columns})


def mutated(columns: Columns, rng: random.Random, n: int) -> Columns:
    """One fault: a number changed, two entries swapped, a clique or a bag dropped, two cliques joined."""
    fault = rng.choice((_change, _swap, _drop_clique, _drop_bag, _join_cliques))
    return fault({name: column.copy() for name, column in columns.items()}, rng, n)


def _change(columns: Columns, rng: random.Random, n: int) -> Columns:
    column = columns[rng.choice([name for name in columns if columns[name].size])]
    at = rng.randrange(column.size)
    column[at] = rng.randrange(n) if column.dtype == np.uint32 else int(column[at]) + rng.choice((-2, -1, 1, 2))
    return columns


def _swap(columns: Columns, rng: random.Random, n: int) -> Columns:
    column = columns[rng.choice([name for name in columns if columns[name].size])]
    i, j = rng.randrange(column.size), rng.randrange(column.size)
    column[[i, j]] = column[[j, i]]
    return columns


def _drop_clique(columns: Columns, rng: random.Random, n: int) -> Columns:
    if columns["proof_clique_weight"].size:
        _cut(columns, "clique", rng.randrange(columns["proof_clique_weight"].size), ("weight",))
    return columns


def _join_cliques(columns: Columns, rng: random.Random, n: int) -> Columns:
    """Two cliques as one of the larger weight: all vertices stay covered, and the bound gets better."""
    start, weight = columns["proof_clique_start"], columns["proof_clique_weight"]
    if weight.size < 2:
        return columns
    k = rng.randrange(weight.size - 1)
    joined = np.unique(columns["proof_clique_vertex"][start[k] : start[k + 2]])
    sizes = np.delete(np.diff(start), k)
    sizes[k] = joined.size
    old = columns["proof_clique_vertex"]
    columns["proof_clique_vertex"] = np.concatenate((old[: start[k]], joined, old[start[k + 2] :]))
    columns["proof_clique_start"] = np.concatenate((np.zeros(1, np.int64), np.cumsum(sizes)))
    columns["proof_clique_weight"] = np.delete(weight, k)
    columns["proof_clique_weight"][k] = max(weight[k], weight[k + 1])
    return columns


def _drop_bag(columns: Columns, rng: random.Random, n: int) -> Columns:
    """Drop a bag with its homes; what hung from it becomes a root with all its vertices at home."""
    above = columns["proof_bag_above"]
    if not above.size:
        return columns
    gone = rng.randrange(above.size)
    sizes = np.diff(columns["proof_bag_start"]) - columns["proof_bag_adhesion"]
    owner = np.repeat(np.arange(above.size), sizes)
    columns["proof_home_weight"] = columns["proof_home_weight"][owner != gone]
    columns["proof_bag_above"] = np.where(above == gone, above[gone], above - (above > gone))
    _cut(columns, "bag", gone, ("adhesion", "above"))
    return columns


def _cut(columns: Columns, what: str, gone: int, others: tuple[str, ...]) -> None:
    start = columns[f"proof_{what}_start"]
    sizes = np.diff(start)
    kept = np.repeat(np.arange(sizes.size) != gone, sizes)
    columns[f"proof_{what}_vertex"] = columns[f"proof_{what}_vertex"][kept]
    columns[f"proof_{what}_start"] = np.concatenate((np.zeros(1, np.int64), np.cumsum(np.delete(sizes, gone))))
    for name in others:
        columns[f"proof_{what}_{name}"] = np.delete(columns[f"proof_{what}_{name}"], gone)
