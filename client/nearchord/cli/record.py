"""An answer as the JSON object that programs rely on, and as lines for people; what only one question has is told by a
module of its own."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Any

import nearchord
from nearchord.cli import proof_file
from nearchord.cli.answers import choice, fill, plan, structure
from nearchord.cli.layout import print_entry
from nearchord.cli.numbers import exact
from nearchord.cli.subject import Subject
from nearchord.question import Plan, pins_of


def record(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    """The object of `--json`: every key of a question, and of the add-ons that were asked for, is always there, null
    where a figure was not reached."""
    labels = subject.labels
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
        **_of_its_question(answer, subject),
        "provenance": _provenance(answer.provenance),
    }


def _of_its_question(answer: nearchord.Answer, subject: Subject) -> dict[str, Any]:
    match answer.question:
        case nearchord.Fill():
            return fill.record(answer, subject.labels)
        case nearchord.Structure():
            return structure.record(answer)
        case Plan():
            return plan.record(answer, subject)
    return choice.record(answer, subject)


def show(answer: nearchord.Answer, subject: Subject) -> None:
    """Print an answer for people."""
    print_entry("verdict", f"{answer.verdict}: {answer.reason}")
    match answer.question:
        case nearchord.Fill():
            _print(fill.lines(answer))
            _print(_ending(answer))
            fill.show_pairs(answer, subject.labels)
        case nearchord.Structure():
            _print(structure.lines(answer))
            _print(_ending(answer))
            structure.show_predictions(answer)
        case Plan():
            _print(plan.lines(answer))
            _print(_ending(answer))
            plan.show(answer, subject)
        case _:
            _print(choice.lines(answer))
            _print(_ending(answer))
            choice.show(answer, subject)


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
