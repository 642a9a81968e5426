"""Enumerations of the model and their numbers on the wire."""

from __future__ import annotations

from collections.abc import Iterable
from enum import StrEnum
from typing import Any, TypeVar

from nearchord.v1 import answer_pb2, content_pb2, job_pb2, question_pb2

from nearchord_service.model.answer import ElementType, ProofKind
from nearchord_service.model.content import ContentKind
from nearchord_service.model.event import Phase
from nearchord_service.model.question import QuestionName, WhenOver
from nearchord_service.model.stage import Stage, Verdict

E = TypeVar("E", bound=StrEnum)


def _numbers(members: Iterable[E], enum: Any, prefix: str) -> dict[E, Any]:
    return {member: enum.Value(f"{prefix}_{member.name}") for member in members}


STAGES: dict[Stage, job_pb2.Stage] = _numbers(Stage, job_pb2.Stage, "STAGE")
VERDICTS: dict[Verdict, job_pb2.Verdict] = _numbers(Verdict, job_pb2.Verdict, "VERDICT")
PHASES: dict[Phase, job_pb2.Phase] = _numbers(Phase, job_pb2.Phase, "PHASE")
WHEN_OVERS: dict[WhenOver, question_pb2.WhenOver] = _numbers(WhenOver, question_pb2.WhenOver, "WHEN_OVER")
CONTENT_KINDS: dict[ContentKind, content_pb2.ContentKind] = _numbers(
    ContentKind, content_pb2.ContentKind, "CONTENT_KIND"
)
ELEMENT_TYPES: dict[ElementType, answer_pb2.ElementType] = _numbers(ElementType, answer_pb2.ElementType, "ELEMENT_TYPE")
PROOF_KINDS: dict[ProofKind, answer_pb2.ProofKind] = {
    ProofKind.CERTIFICATE: answer_pb2.PROOF_KIND_CERTIFICATE,
    ProofKind.SEARCH: answer_pb2.PROOF_KIND_SEARCH,
    ProofKind.PACKING: answer_pb2.PROOF_KIND_PACKING,
    ProofKind.BRANCH: answer_pb2.PROOF_KIND_BRANCH,
    ProofKind.NONE: answer_pb2.PROOF_KIND_UNSPECIFIED,
}
QUESTION_FIELDS: dict[QuestionName, str] = {name: name.name.lower() for name in QuestionName}
"""The field of the message `Question` for each question."""

STAGES_BY_NUMBER = {number: stage for stage, number in STAGES.items()}
WHEN_OVERS_BY_NUMBER = {number: member for member, number in WHEN_OVERS.items()}
CONTENT_KINDS_BY_NUMBER = {number: kind for kind, number in CONTENT_KINDS.items()}
QUESTIONS_BY_FIELD = {field: name for name, field in QUESTION_FIELDS.items()}
