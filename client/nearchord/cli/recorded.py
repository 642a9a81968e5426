"""From the JSON object of `--json` back to an answer that can be checked."""

from __future__ import annotations

import hashlib
import json
import sys
from collections.abc import Callable, Iterable
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np

import nearchord
from nearchord.cli import witness
from nearchord.cli.answers import plan, prices, sets
from nearchord.question import Choice


def load(file: str, graph: nearchord.Graph) -> nearchord.Answer:
    """Read the object in `file` (- for stdin) as an answer about `graph`; FileProblem says what does not fit."""
    try:
        text = sys.stdin.read() if file == "-" else Path(file).read_text(encoding="utf-8")
        found = json.loads(text)
    except (UnicodeDecodeError, json.JSONDecodeError) as error:
        raise nearchord.FileProblem(file, None, f"this is not JSON ({error})", "give what `--json` printed") from None
    if not isinstance(found, dict):
        raise nearchord.FileProblem(file, None, "this is not a JSON object", "give one object, as `--json` prints it")
    return _Reader(file, found, graph).answer()


class _Reader:
    """Takes an object apart, key by key."""

    def __init__(self, file: str, found: dict[str, Any], graph: nearchord.Graph) -> None:
        self._file = file
        self._found = found
        self._graph = graph

    def answer(self) -> nearchord.Answer:
        verdict = self._word("verdict", [str(verdict) for verdict in nearchord.Verdict])
        return nearchord.Answer(
            job_id=str(self._found.get("job", "")),
            batch_index=0,
            label=str(self._found.get("label", "")),
            question=self._question(),
            verdict=nearchord.Verdict(verdict),
            value=self._exact("value"),
            bound=self._exact("bound"),
            chosen=np.array(sorted(self._vertices("chosen")), dtype=np.uint32),
            reason=str(self._found.get("reason", "")),
            fill=self._count("fill"),
            fill_lower_bound=self._count("fill_lower_bound"),
            states=self._count("states"),
            bags=self._count("bags"),
            largest_bag=self._count("largest_bag"),
            parts=self._count("parts"),
            fill_cores=self._count("fill_cores"),
            proof=self._proof(),
            proof_kinds=self._proof_kinds(),
            seconds=0.0,
            vertices=self._graph.n,
            names_address="",
            provenance=nearchord.Provenance(
                graph_address=self._address("graph_address", self._graph.address),
                weights_address=self._address("weights_address", _weights_address(self._graph)),
                solver_version="",
                proof_format=0,
                budget=nearchord.Budget(fill=self._fill_budget()),
                when_over=nearchord.WhenOver.BOUND,
                attempt=0,
                phases=(),
                seconds=0.0,
                wait_seconds=0.0,
                peak_memory_bytes=0,
                finished_at=None,
            ),
            columns=self._columns(),
            recognition=self._recognition(),
            structure=self._structure(),
            count=self._taken("count", sets.count_from),
        )

    def _question(self) -> nearchord.Question:
        kind = nearchord.QUESTIONS[self._word("question", nearchord.QUESTIONS)]
        if not issubclass(kind, Choice):
            return kind()
        return kind(must=self._vertices("must"), never=self._vertices("never"), **self._add_ons(kind))

    def _add_ons(self, kind: type[nearchord.Question]) -> dict[str, Any]:
        """What was asked for beside the choice: what is said under `add_ons`, or is there."""
        said = self._found.get("add_ons")
        asked = {**self._taken("best or scenarios", _there), **(said if isinstance(said, dict) else {})}
        return {name: asked[name] for name in kind.add_ons() if name in asked}

    def _proof(self) -> nearchord.ProofKind:
        kind = self._found.get("proof") or nearchord.ProofKind.NONE
        try:
            return nearchord.ProofKind(kind)
        except ValueError:
            known = ", ".join(nearchord.ProofKind)
            raise self._problem("proof", f"is {kind!r}", f"give one of {known}") from None

    def _proof_kinds(self) -> tuple[nearchord.ProofKind, ...]:
        kinds = self._found.get("proof_kinds") or ()
        try:
            return tuple(map(nearchord.ProofKind, kinds))
        except (TypeError, ValueError):
            known = ", ".join(nearchord.ProofKind)
            raise self._problem("proof_kinds", f"is {kinds!r}", f"give a list of {known}") from None

    def _fill_budget(self) -> int | None:
        origin = self._found.get("provenance")
        budget = origin.get("budget") if isinstance(origin, dict) else None
        fill = budget.get("fill") if isinstance(budget, dict) else None
        return fill if isinstance(fill, int) else None

    def _columns(self) -> dict[str, Any]:
        columns: dict[str, Any] = {}
        if self._found.get("question") in (nearchord.Colouring.name, nearchord.FractionalColouring.name):
            columns.update(self._taken("colour, shares or bottleneck", self._plan))
        elif isinstance(self._found.get("colour"), dict):
            columns["colour"] = self._colour()
        columns.update(self._taken("best or scenarios", lambda found: sets.columns(found, self._of)))
        columns.update(self._taken("price_in, price_out or conflict_prices", self._prices))
        pairs = self._pairs("fill_edges")
        if self._found.get("witness") is not None:
            columns.update(self._taken("witness", self._witness))
        if pairs is not None:
            columns["fill_edge"] = pairs
        return columns

    def _plan(self, found: dict[str, Any]) -> dict[str, Any]:
        return plan.columns(found, self._of, self._graph.n)

    def _prices(self, found: dict[str, Any]) -> dict[str, Any]:
        return prices.columns(found, self._of, self._graph)

    def _of(self, name: object) -> int:
        return self._vertex("a column", name)

    def _taken(self, key: str, read: Callable[[dict[str, Any]], Any]) -> Any:
        """What a reader of some keys makes of the object; what it cannot read is a problem of these keys."""
        try:
            return read(self._found)
        except nearchord.BadInput:
            raise
        except (ArithmeticError, AttributeError, IndexError, KeyError, TypeError, ValueError) as error:
            raise self._problem(key, f"cannot be read ({error})", "give what `--json` printed") from None

    def _colour(self) -> Any:
        """Colours by the ascending order of their vertices."""
        by_vertex = {self._vertex("colour", name): colour for name, colour in self._found["colour"].items()}
        try:
            return np.array([by_vertex[v] for v in sorted(by_vertex)], np.uint32)
        except (OverflowError, TypeError, ValueError):
            raise self._problem("colour", "has a colour that is no number", "give whole numbers from 1") from None

    def _pairs(self, key: str) -> Any:
        """Pairs as one flat column in the form of the contract: smaller end first, ascending."""
        if self._found.get(key) is None:
            return None
        try:
            ends = [(self._vertex(key, u), self._vertex(key, v)) for u, v in self._found[key]]
        except nearchord.BadInput:
            raise
        except (TypeError, ValueError):
            raise self._problem(key, "is not a list of pairs", "give two names of vertices in each") from None
        return np.array(sorted((min(pair), max(pair)) for pair in ends), np.uint32).reshape(-1)

    def _witness(self, found: dict[str, Any]) -> dict[str, Any]:
        return witness.from_json(found["witness"], lambda name: self._vertex("witness", name), self._graph.n)

    def _recognition(self) -> nearchord.Recognition | None:
        if "chordal" not in self._found:
            return None
        return nearchord.Recognition(
            self._flag("chordal"), self._flag("interval"), self._flag("split"), self._count("splittance")
        )

    def _flag(self, key: str) -> bool | None:
        value = self._found.get(key)
        if value is not None and not isinstance(value, bool):
            raise self._problem(key, f"is {value!r}", "give true, false, or null")
        return value

    def _structure(self) -> nearchord.StructureReport | None:
        components, largest = self._count("components"), self._count("largest_core")
        if components is None or largest is None:
            return None
        return nearchord.StructureReport(components, largest, ())

    def _word(self, key: str, allowed: Iterable[str]) -> str:
        value = str(self._found.get(key))
        if value not in set(allowed):
            raise self._problem(key, f"is {value!r}", f"it has to be one of {', '.join(allowed)}")
        return value

    def _exact(self, key: str) -> int | Fraction | None:
        value = self._found.get(key)
        if value is None or (isinstance(value, int) and not isinstance(value, bool)):
            return value
        try:
            return Fraction(value if isinstance(value, str) else "")
        except (ValueError, ZeroDivisionError):
            raise self._problem(key, f"is {value!r}", 'give a whole number, "p/q", or null') from None

    def _count(self, key: str) -> int | None:
        value = self._found.get(key)
        return value if isinstance(value, int) else None

    def _address(self, key: str, own: str) -> str:
        """What the answer says it is about; an answer that says nothing is taken to be about the graph at hand."""
        origin = self._found.get("provenance")
        return str(origin.get(key, own)) if isinstance(origin, dict) else own

    def _vertices(self, key: str) -> tuple[int, ...]:
        listed = self._found.get(key) or []
        if not isinstance(listed, list):
            raise self._problem(key, "is not a list", "give the names of the vertices in a list")
        return tuple(self._vertex(key, name) for name in listed)

    def _vertex(self, key: str, name: object) -> int:
        try:
            return self._graph.vertex(str(name))
        except KeyError:
            raise self._problem(key, f"names {name!r}, which the graph does not have", "check both files") from None

    def _problem(self, key: str, problem: str, remedy: str) -> nearchord.FileProblem:
        return nearchord.FileProblem(self._file, None, f'"{key}" {problem}', remedy)


def _there(found: dict[str, Any]) -> dict[str, Any]:
    """The add-ons that an object without `add_ons` has to be about."""
    return {
        "prices": found.get("price_in") is not None,
        "conflict_prices": found.get("conflict_prices") is not None,
        "best": len(found.get("best") or ()),
        "count": found.get("count") is not None,
        "scenarios": len(found.get("scenarios") or ()),
        "colours": found.get("colours", 2),
    }


def _weights_address(graph: nearchord.Graph) -> str:
    return "" if graph.weights is None else hashlib.sha256(graph.weights.astype("<i8").tobytes()).hexdigest()
