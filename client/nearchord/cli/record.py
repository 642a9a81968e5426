"""An answer as the JSON object that programs rely on, and as lines for people."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from fractions import Fraction
from typing import Any

import nearchord
from nearchord.cli.layout import print_entry, print_listing

Names = Sequence[str] | None


def record(answer: nearchord.Answer, names: Names) -> dict[str, Any]:
    """The object of `--json`: every key is always there, null where a figure was not reached."""
    return {
        "job": answer.job_id,
        "label": answer.label,
        "question": answer.question.name,
        "must": called(answer.question.must, names),
        "never": called(answer.question.never, names),
        "verdict": str(answer.verdict),
        "value": exact(answer.value),
        "bound": exact(answer.bound),
        "chosen": called(answer.chosen, names),
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
        "vertices": answer.vertices,
        "provenance": _provenance(answer.provenance),
    }


def called(vertices: Iterable[int | str], names: Names) -> list[str | int]:
    """What vertices are called in the file: numbers where every name of the graph is one, as in DIMACS files."""
    numbers = [int(vertex) for vertex in vertices]
    if names is None:
        return list(numbers)
    picked = [names[number] for number in numbers]
    return [int(name) for name in picked] if all(map(_is_decimal, names)) else list(picked)


def lines(answer: nearchord.Answer) -> Iterator[tuple[str, str]]:
    """Its figures for people, as captions and texts; what was not reached is left out."""
    yield "verdict", f"{answer.verdict}: {answer.reason}"
    if answer.value is not None:
        side = "at most" if answer.question.maximises else "at least"
        proven = answer.verdict is nearchord.Verdict.PROVEN
        optimum = "nothing better exists" if proven else f"the optimum is {side} {number(answer.bound)}"
        yield "value", f"{number(answer.value)} ({optimum})"
        yield "chosen", f"{len(answer.chosen):,} of {answer.vertices:,} vertices"
    if answer.fill is not None:
        least = f" (any triangulation needs {answer.fill_lower_bound:,})" if answer.fill_lower_bound else ""
        yield "fill", f"{answer.fill:,}{least}"
    if answer.bags:
        largest = f", the largest with {answer.largest_bag:,} vertices" if answer.largest_bag is not None else ""
        yield "bags", f"{answer.bags:,}{largest}"
    yield "proof", str(answer.proof)
    yield "seconds", f"{answer.seconds:.3f}"
    yield "job", answer.job_id


def show(answer: nearchord.Answer, names: Names) -> None:
    """Print an answer for people."""
    for caption, text in lines(answer):
        print_entry(caption, text)
    if answer.value is not None:
        print_listing("names", [str(name) for name in called(answer.chosen, names)])


def exact(value: int | Fraction | None) -> int | str | None:
    """A value as JSON has it: whole, "p/q", or null."""
    if value is None or isinstance(value, int):
        return value
    return value.numerator if value.denominator == 1 else f"{value.numerator}/{value.denominator}"


def number(value: int | Fraction | None) -> str:
    """A value as people read it."""
    return "unknown" if value is None else f"{value:,}" if isinstance(value, int) else str(value)


def _is_decimal(name: str) -> bool:
    return name.isdecimal() and str(int(name)) == name


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
