"""An answer as the JSON object that programs rely on, and as lines for people; what only one question has is told by a
module of its own."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Any

import nearchord
from nearchord.cli import proof_file
from nearchord.cli.answers import choice, fill, structure
from nearchord.cli.layout import print_entry
from nearchord.cli.names import Labels, Names
from nearchord.cli.numbers import exact
from nearchord.question import pins_of


def record(answer: nearchord.Answer, names: Names) -> dict[str, Any]:
    """The object of `--json`: every key of a question is always there, null where a figure was not reached."""
    labels = Labels(names)
    must, never = pins_of(answer.question)
    return {
        "job": answer.job_id,
        "label": answer.label,
        "question": answer.question.name,
        "must": labels.of(must),
        "never": labels.of(never),
        "verdict": str(answer.verdict),
        "value": exact(answer.value),
        "bound": exact(answer.bound),
        "chosen": labels.of(answer.chosen.tolist()),
        "fill": answer.fill,
        "fill_lower_bound": answer.fill_lower_bound,
        "states": answer.states,
        "bags": answer.bags,
        "largest_bag": answer.largest_bag,
        "parts": answer.parts,
        "fill_cores": answer.fill_cores,
        "seconds": round(answer.seconds, 6),
        "reason": answer.reason,
        "proof": str(answer.proof),
        "proof_kinds": [str(kind) for kind in answer.proof_kinds],
        "proof_bytes": answer.proof_bytes,
        "vertices": answer.vertices,
        **_of_its_question(answer, labels),
        "provenance": _provenance(answer.provenance),
    }


def _of_its_question(answer: nearchord.Answer, labels: Labels) -> dict[str, Any]:
    match answer.question:
        case nearchord.Fill():
            return fill.record(answer, labels)
        case nearchord.Structure():
            return structure.record(answer)
        case nearchord.ColourableSubgraph():
            return choice.colour_record(answer, answer.question, labels)
    return {}


def show(answer: nearchord.Answer, names: Names) -> None:
    """Print an answer for people."""
    print_entry("verdict", f"{answer.verdict}: {answer.reason}")
    labels = Labels(names)
    match answer.question:
        case nearchord.Fill():
            _print(fill.lines(answer))
            _print(_ending(answer))
            fill.show_pairs(answer, labels)
        case nearchord.Structure():
            _print(structure.lines(answer))
            _print(_ending(answer))
            structure.show_predictions(answer)
        case _:
            _print(choice.lines(answer))
            _print(_ending(answer))
            choice.show_names(answer, labels)


def _print(entries: Iterable[tuple[str, str]]) -> None:
    for caption, text in entries:
        print_entry(caption, text)


def _ending(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    large = f" of {proof_file.size_of(answer)}" if answer.proof_bytes else ""
    yield "proof", f"{answer.proof}{large}"
    yield "seconds", f"{answer.seconds:.3f}"
    yield "job", answer.job_id


def _provenance(origin: nearchord.Provenance) -> dict[str, Any]:
    return {
        "graph_address": origin.graph_address,
        "weights_address": origin.weights_address,
        "solver_version": origin.solver_version,
        "proof_format": origin.proof_format,
        "budget": {
            "fill": origin.budget.fill,
            "states": origin.budget.states,
            "seconds": origin.budget.seconds,
            "memory": origin.budget.memory,
        },
        "when_over": str(origin.when_over),
        "attempt": origin.attempt,
        "phase_seconds": {str(phase).lower(): round(seconds, 6) for phase, seconds in origin.phases},
        "wait_seconds": round(origin.wait_seconds, 6),
        "peak_memory_bytes": origin.peak_memory_bytes,
        "finished_at": None if origin.finished_at is None else origin.finished_at.isoformat(),
    }
