"""Answers with all add-ons for small graphs, as a session would give them, by trying every set of vertices."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace
from itertools import combinations
from typing import Any

import nearchord
import numpy as np
from definition import is_colourable, is_forest, is_independent
from nearchord.question import Choice
from nearchord.stages import WhenOver

Sets = list[tuple[int, tuple[int, ...]]]


def choice_answer(graph: nearchord.Graph, question: Choice, **changes: Any) -> nearchord.Answer:
    """The best choice under the graph's weights, or in each scenario, with what was asked for beside it."""
    vectors = question.vectors
    rows = [given(graph)] if vectors is None else vectors.tolist()
    ranked = [ranking(graph, question, row) for row in rows]
    value, chosen = ranked[0][0] if ranked[0] else (None, ())
    columns: dict[str, np.ndarray] = {}
    if ranked[0] and vectors is not None:
        columns = scenario_columns(graph, question, [sets[0] for sets in ranked])
    elif ranked[0]:
        columns = columns_beside(graph, question, ranked[0])
    if isinstance(question, nearchord.ColourableSubgraph):
        columns["colour"] = numbers(colours_of(graph, chosen, question.colours), np.uint32)
    address = "" if graph.weights is None and vectors is None else digest(np.concatenate([np.int64(r) for r in rows]))
    origin = nearchord.Provenance(
        graph.address, address, "1", 0, nearchord.Budget(), WhenOver.BOUND, 1, (), 0.0, 0.0, 0, None
    )
    fields: dict[str, Any] = {
        "job_id": "a" * 32,
        "batch_index": 0,
        "label": "",
        "question": question if vectors is None else replace(question, scenarios=len(vectors)),
        "verdict": nearchord.Verdict.PROVEN if ranked[0] else nearchord.Verdict.INFEASIBLE,
        "value": value,
        "bound": value,
        "chosen": numbers(chosen, np.uint32),
        "reason": "every set was tried",
        **dict.fromkeys(("fill", "fill_lower_bound", "states", "bags", "largest_bag", "parts", "fill_cores")),
        "proof": nearchord.ProofKind.SEARCH,
        "proof_kinds": (),
        "seconds": 0.25,
        "vertices": graph.n,
        "names_address": "",
        "provenance": origin,
        "columns": columns,
    }
    if getattr(question, "count", False) and ranked[0]:
        fields["count"] = sum(weight == value for weight, _ in ranked[0])
    return nearchord.Answer(**{**fields, **changes})


def given(graph: nearchord.Graph) -> list[int]:
    weights: list[int] = [1] * graph.n if graph.weights is None else graph.weights.tolist()
    return weights


def digest(weights: np.ndarray) -> str:
    return hashlib.sha256(weights.astype("<i8").tobytes()).hexdigest()


def numbers(values: Iterable[int], kind: type[np.generic] = np.int64) -> np.ndarray:
    return np.array(list(values), kind)


def pairs_of(graph: nearchord.Graph) -> list[tuple[int, int]]:
    u, v = graph.edges()
    return list(zip(u.tolist(), v.tolist(), strict=True))


def ranking(graph: nearchord.Graph, question: Choice, weights: Sequence[int], without: int | None = None) -> Sets:
    """Every set that meets the question with its weight, heaviest first; `without` drops an edge."""
    pairs = [pair for place, pair in enumerate(pairs_of(graph)) if place != without]
    meets: Callable[..., bool] = {
        "independent-set": is_independent,
        "induced-forest": is_forest,
        "colourable-subgraph": lambda edges, chosen: is_colourable(edges, chosen, getattr(question, "colours", 1)),
    }[question.name]
    limit = getattr(question, "limit", None)
    free = [v for v in range(graph.n) if v not in question.must and v not in question.never]
    if set(question.must) & set(question.never):
        return []
    sets = []
    for size in range(len(free) + 1):
        for more in combinations(free, size):
            chosen = tuple(sorted((*question.must, *more)))
            if (limit is None or len(chosen) <= limit) and meets(pairs, chosen):
                sets.append((sum(weights[v] for v in chosen), chosen))
    return sorted(sets, key=lambda one: (-one[0], one[1]))


def columns_beside(graph: nearchord.Graph, question: Choice, sets: Sets) -> dict[str, np.ndarray]:
    """Prices and best sets, from all sets."""
    best, columns = sets[0][0], {}
    if getattr(question, "prices", False):
        for name, side in (("price_in", True), ("price_out", False)):
            values = [[weight for weight, chosen in sets if (v in chosen) == side] for v in range(graph.n)]
            columns[name] = numbers(best - max(found) if found else -1 for found in values)
    if getattr(question, "conflict_prices", False):
        gains = (ranking(graph, question, given(graph), edge)[0][0] - best for edge in range(graph.m))
        columns["conflict_price"] = numbers(gains)
    most = getattr(question, "best", 0)
    if most > 1:
        columns["best_value"] = numbers(weight for weight, _ in sets[:most])
        columns["best_start"] = numbers(np.cumsum([0, *(len(chosen) for _, chosen in sets[:most])]))
        columns["best_chosen"] = numbers((v for _, chosen in sets[:most] for v in chosen), np.uint32)
    return columns


def scenario_columns(graph: nearchord.Graph, question: Choice, best: Sets) -> dict[str, np.ndarray]:
    """What each scenario came to."""
    columns = {
        "scenario_value": numbers(weight for weight, _ in best),
        "scenario_bound": numbers(weight for weight, _ in best),
        "scenario_start": numbers(np.cumsum([0, *(len(chosen) for _, chosen in best)])),
        "scenario_chosen": numbers((v for _, chosen in best for v in chosen), np.uint32),
    }
    if isinstance(question, nearchord.ColourableSubgraph):
        colours = (colours_of(graph, chosen, question.colours) for _, chosen in best)
        columns["scenario_colour"] = numbers((colour for of in colours for colour in of), np.uint32)
    return columns


def colours_of(graph: nearchord.Graph, chosen: Sequence[int], colours: int) -> list[int]:
    """The first of the colourings of the chosen vertices."""
    pairs = [pair for pair in pairs_of(graph) if set(pair) <= set(chosen)]
    for number in range(colours ** len(chosen)):
        given = {v: number // colours**place % colours + 1 for place, v in enumerate(chosen)}
        if all(given[u] != given[v] for u, v in pairs):
            return list(given.values())
    raise AssertionError("not colourable")
