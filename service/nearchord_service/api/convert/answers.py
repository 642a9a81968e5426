"""Answers as streams: a head, then the columns in pieces."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import asdict

from nearchord.v1 import answer_pb2

from nearchord_service.api.convert.enums import ELEMENT_TYPES, PHASES, PROOF_KINDS, VERDICTS, WHEN_OVERS
from nearchord_service.api.convert.questions import from_budget, from_question
from nearchord_service.api.convert.times import to_timestamp
from nearchord_service.api.limits import PIECE_BYTES
from nearchord_service.model.answer import Answer, Column, Recognition, StructureReport
from nearchord_service.model.job import Job


def answer_parts(job: Job, answer: Answer) -> Iterator[answer_pb2.AnswerPart]:
    """Yield the messages of one answer, none larger than a piece and a little."""
    yield answer_pb2.AnswerPart(head=_head(job, answer))
    for column in answer.columns:
        for chunk in _chunks(column):
            yield answer_pb2.AnswerPart(column=chunk)


def answer_bytes(answer: Answer) -> int:
    """Return the bytes that an answer's columns hold in memory."""
    return sum(len(column.data) for column in answer.columns)


def _chunks(column: Column) -> Iterator[answer_pb2.ColumnChunk]:
    size = column.type.size_bytes
    step = PIECE_BYTES - PIECE_BYTES % size
    view = memoryview(column.data)
    for first in range(0, len(view), step):
        yield answer_pb2.ColumnChunk(name=column.name, offset=first // size, data=bytes(view[first : first + step]))


def _rational(pair: tuple[int, int] | None) -> answer_pb2.Rational | None:
    return None if pair is None else answer_pb2.Rational(numerator=pair[0], denominator=pair[1])


def _head(job: Job, answer: Answer) -> answer_pb2.AnswerHead:
    return answer_pb2.AnswerHead(
        job_id=job.id,
        batch_index=job.batch_index,
        label=job.label,
        question=from_question(job.question),
        verdict=VERDICTS[answer.verdict],
        value=_rational(answer.value),
        bound=_rational(answer.bound),
        reason=answer.reason,
        fill=answer.fill,
        fill_lower_bound=answer.fill_lower_bound,
        states=answer.states,
        bags=answer.bags,
        largest_bag=answer.largest_bag,
        parts=answer.parts,
        fill_cores=answer.fill_cores,
        proof=PROOF_KINDS[answer.proof],
        proof_kinds=[PROOF_KINDS[kind] for kind in answer.proof_kinds],
        provenance=_provenance(job, answer),
        columns=[_info(column) for column in answer.columns],
        names_address=job.names_address or "",
        vertices=job.vertices,
        recognition=_recognition(answer.recognition),
        structure=_structure(answer.structure),
        count=answer.count,
    )


def _recognition(found: Recognition | None) -> answer_pb2.Recognition | None:
    return None if found is None else answer_pb2.Recognition(**asdict(found))


def _structure(report: StructureReport | None) -> answer_pb2.StructureReport | None:
    if report is None:
        return None
    return answer_pb2.StructureReport(
        components=report.components,
        largest_core=report.largest_core,
        predictions=[answer_pb2.Prediction(**asdict(prediction)) for prediction in report.predictions],
    )


def _info(column: Column) -> answer_pb2.ColumnInfo:
    return answer_pb2.ColumnInfo(
        name=column.name, type=ELEMENT_TYPES[column.type], length=len(column.data) // column.type.size_bytes
    )


def _provenance(job: Job, answer: Answer) -> answer_pb2.Provenance:
    waited_until = job.started_at or job.finished_at
    return answer_pb2.Provenance(
        graph_address=job.graph_address,
        weights_address=job.weights_address or "",
        solver_version=answer.solver_version,
        proof_format=answer.proof_format,
        budget=from_budget(job.budget),
        when_over=WHEN_OVERS[job.when_over],
        attempt=job.attempt,
        phases=[
            answer_pb2.PhaseSeconds(phase=PHASES[phase], seconds=seconds) for phase, seconds in answer.phase_seconds
        ],
        seconds=answer.seconds,
        wait_seconds=(waited_until - job.created_at).total_seconds() if waited_until else 0.0,
        peak_memory_bytes=answer.peak_memory_bytes,
        finished_at=to_timestamp(job.finished_at),
    )
