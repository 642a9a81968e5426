"""Rows to model values and back. Tuples, times and exact numbers have one written form each, stated here."""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from nearchord_service.model.answer import (
    Answer,
    Column,
    ElementType,
    Prediction,
    ProofKind,
    Recognition,
    StructureReport,
)
from nearchord_service.model.content import Content, ContentKind
from nearchord_service.model.event import Event, Phase, Progress, Reached
from nearchord_service.model.job import Batch, Job, JobSpec
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.sql.statement import Row

_EPOCH = dt.datetime(1970, 1, 1, tzinfo=dt.UTC)
_MICROSECOND = dt.timedelta(microseconds=1)


def micros(time: dt.datetime) -> int:
    """Return an aware time as microseconds since 1970."""
    return (time - _EPOCH) // _MICROSECOND


def moment(value: int) -> dt.datetime:
    """Return microseconds since 1970 as an aware time in UTC."""
    return _EPOCH + dt.timedelta(microseconds=value)


def _moment_or_none(value: int | None) -> dt.datetime | None:
    return None if value is None else moment(value)


def _compact(value: object) -> str:
    return json.dumps(value, ensure_ascii=False, separators=(",", ":"))


def terms_of(spec: JobSpec) -> str:
    """Write down what a job asks and may spend."""
    question, budget = spec.question, spec.budget
    return _compact(
        {
            "question": {
                "name": question.name,
                "must": question.must,
                "never": question.never,
                **{field: getattr(question, field) for field in question.name.add_ons},
            },
            "budget": {
                "fill": budget.fill,
                "states": budget.states,
                "seconds": budget.seconds,
                "memory_bytes": budget.memory_bytes,
            },
            "when_over": spec.when_over,
        }
    )


def question_name(row: Row) -> QuestionName:
    """Return what a job's row asks."""
    return QuestionName(json.loads(row["terms"])["question"]["name"])


def _terms(text: str) -> tuple[Question, Budget, WhenOver]:
    terms = json.loads(text)
    asked = terms["question"]
    name = QuestionName(asked["name"])
    # A row written by an earlier release has fewer add-ons, those that there were then.
    add_ons = {field: asked[field] for field in name.add_ons if field in asked}
    question = Question(name, tuple(asked["must"]), tuple(asked["never"]), **add_ons)
    return question, Budget(**terms["budget"]), WhenOver(terms["when_over"])


def job_from(row: Row) -> Job:
    """Return the job of a row of `jobs` joined with its `batch_id`."""
    question, budget, when_over = _terms(row["terms"])
    return Job(
        id=row["id"],
        owner=row["owner"],
        batch_id=row["batch_id"],
        batch_index=row["batch_index"],
        label=row["label"],
        graph_address=row["graph_address"],
        weights_address=row["weights_address"],
        names_address=row["names_address"],
        vertices=row["vertices"],
        edges=row["edges"],
        question=question,
        budget=budget,
        when_over=when_over,
        priority=row["priority"],
        not_after=_moment_or_none(row["not_after"]),
        stage=Stage(row["stage"]),
        verdict=_verdict(row["verdict"]),
        reason=row["reason"],
        attempt=row["attempt"],
        cancel_requested=bool(row["cancel_requested"]),
        created_at=moment(row["created_at"]),
        started_at=_moment_or_none(row["started_at"]),
        finished_at=_moment_or_none(row["finished_at"]),
        sequence=row["sequence"],
    )


def _verdict(value: str | None) -> Verdict | None:
    return None if value is None else Verdict(value)


def batch_from(row: Row, counts: Sequence[Row]) -> Batch:
    """Return the batch of a row and of its (stage, count) rows."""
    by_stage = {count["stage"]: count["jobs"] for count in counts}
    return Batch(
        id=row["id"],
        owner=row["owner"],
        label=row["label"],
        created_at=moment(row["created_at"]),
        jobs=sum(by_stage.values()),
        waiting=by_stage.get(Stage.WAITING, 0),
        solving=by_stage.get(Stage.SOLVING, 0),
        done=by_stage.get(Stage.DONE, 0),
    )


def content_from(row: Row) -> Content:
    """Return the content of a row of `contents`."""
    return Content(
        owner=row["owner"],
        address=row["address"],
        kind=ContentKind(row["kind"]),
        size_bytes=row["size_bytes"],
        vertices=row["vertices"],
        edges=row["edges"],
        created_at=moment(row["created_at"]),
    )


def transition_event(row: Row) -> Event:
    """Return the event of a row of `events` joined with its job."""
    news = Reached(Stage(row["stage"]), _verdict(row["verdict"]), row["reason"])
    return Event(row["sequence"], row["id"], row["batch_index"], moment(row["time"]), row["attempt"], news)


def progress_event(row: Row) -> Event:
    """Return the event of a row of `progress` joined with its job."""
    figures: dict[str, Any] = json.loads(row["figures"])
    news = Progress(phase=Phase(figures.pop("phase")), **figures)
    return Event(row["sequence"], row["id"], row["batch_index"], moment(row["time"]), row["attempt"], news)


def progress_figures(progress: Progress) -> str:
    """Write down progress."""
    return _compact(asdict(progress))


def answer_figures(answer: Answer) -> str:
    """Write down an answer without the bytes of its columns; whole numbers of any size stay exact."""
    figures = {name: getattr(answer, name) for name in _PLAIN}
    figures["columns"] = [(column.name, column.type, len(column.data)) for column in answer.columns]
    if answer.count is not None:
        figures["count"] = answer.count
    for name in _OPTIONAL:
        part = getattr(answer, name)
        if part is not None:
            figures[name] = asdict(part)
    return _compact({"format": 1, **figures})


_PLAIN = (
    "verdict",
    "reason",
    "value",
    "bound",
    "fill",
    "fill_lower_bound",
    "states",
    "bags",
    "largest_bag",
    "parts",
    "fill_cores",
    "proof",
    "proof_kinds",
    "solver_version",
    "proof_format",
    "phase_seconds",
    "seconds",
    "peak_memory_bytes",
)
_OPTIONAL = ("recognition", "structure")
"""What only some questions have; left out of the figures where there is none."""


def answer_from(row: Row) -> Answer | None:
    """Return the answer of a row of `jobs` joined with `answers`; what the store itself ended has only a verdict."""
    if row["stage"] != Stage.DONE:
        return None
    if row["figures"] is None:
        return Answer(verdict=Verdict(row["verdict"]), reason=row["reason"])
    figures = json.loads(row["figures"])
    return Answer(
        **{name: figures[name] for name in _PLAIN if name not in _SHAPED},
        verdict=Verdict(figures["verdict"]),
        value=_pair(figures["value"]),
        bound=_pair(figures["bound"]),
        proof=ProofKind(figures["proof"]),
        proof_kinds=tuple(map(ProofKind, figures["proof_kinds"])),
        phase_seconds=tuple((Phase(phase), seconds) for phase, seconds in figures["phase_seconds"]),
        columns=_columns(figures["columns"], row["columns"]),
        count=figures.get("count"),
        recognition=_recognition(figures.get("recognition")),
        structure=_structure(figures.get("structure")),
    )


_SHAPED = frozenset({"verdict", "value", "bound", "proof", "proof_kinds", "phase_seconds"})


def _pair(value: list[int] | None) -> tuple[int, int] | None:
    return None if value is None else (value[0], value[1])


def _recognition(figures: dict[str, Any] | None) -> Recognition | None:
    return None if figures is None else Recognition(**figures)


def _structure(figures: dict[str, Any] | None) -> StructureReport | None:
    if figures is None:
        return None
    predictions = tuple(Prediction(**prediction) for prediction in figures["predictions"])
    return StructureReport(figures["components"], figures["largest_core"], predictions)


def _columns(heads: list[tuple[str, str, int]], data: bytes) -> tuple[Column, ...]:
    columns, begin = [], 0
    for name, element, length in heads:
        columns.append(Column(name, ElementType(element), data[begin : begin + length]))
        begin += length
    return tuple(columns)
