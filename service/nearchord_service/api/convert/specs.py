"""Submitted jobs: from the messages of a caller to checked specs and the fingerprint of the request."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from dataclasses import dataclass

from nearchord.v1 import job_pb2

from nearchord_service.api.convert.content import address_of, to_new_content
from nearchord_service.api.convert.questions import (
    check_vertices,
    depends_on_vertices,
    to_budget,
    to_question,
    to_when_over,
)
from nearchord_service.api.convert.times import from_timestamp
from nearchord_service.api.convert.violations import Violations
from nearchord_service.api.limits import PRIORITIES, Caps, check_address, check_batch, check_inline, label_fault, refuse
from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.job import JobSpec, Submission
from nearchord_service.model.question import Question

_KINDS = {"graph": ContentKind.GRAPH, "weights": ContentKind.WEIGHTS, "names": ContentKind.NAMES}

_PIN_BYTES = 32
"""What a pin takes in memory, roughly."""


@dataclass(frozen=True)
class _Named:
    """Content of a spec: its address, and the bytes where they came inline."""

    address: str
    content: NewContent | None


class SpecReader:
    """Reads the specs of one request, one after the other.

    `vertices_of` returns the number of vertices of a stored graph of the caller, None for an unknown one (blocking); it
    is asked only where the question depends on it. An unknown graph passes: the store refuses it, unless the request
    is a repetition whose graph has been deleted since. Equal inline content is checked and kept once. Blocking, one
    thread at a time.
    """

    def __init__(self, caps: Caps, vertices_of: Callable[[str], int | None]) -> None:
        self._caps = caps
        self._vertices_of = vertices_of
        self._known: dict[tuple[ContentKind, str], NewContent] = {}
        self._stored_vertices: dict[str, int | None] = {}
        self._digest = hashlib.sha256()
        self._specs: list[JobSpec] = []
        self._carried = 0

    @property
    def count(self) -> int:
        """How many specs were read."""
        return len(self._specs)

    def add(self, message: job_pb2.JobSpec, place: str) -> None:
        """Read one more spec, which the request holds at `place`; the message's inline content becomes addresses.

        Raises FieldInvalid, ContentInvalid, QuotaExceeded.
        """
        check_inline(_inline_bytes(message), self._caps, f"{place}.input")
        spec = self._spec(message, place)
        self._specs.append(spec)
        written = message.SerializeToString(deterministic=True)
        self._digest.update(len(written).to_bytes(8, "little"))
        self._digest.update(written)
        self._carried += len(written) + _PIN_BYTES * (len(spec.question.must) + len(spec.question.never))
        check_batch(len(self._specs), self._carried, self._caps)

    def submission(self, owner: str, request_id: str, label: str | None) -> Submission:
        """Return everything read as one request: a batch with a label, or a single job without one (None)."""
        kind = b"job" if label is None else b"batch" + label.encode()
        fingerprint = hashlib.sha256(kind + b"\n" + self._digest.digest()).digest()
        return Submission(owner, request_id, fingerprint, tuple(self._specs), label is not None, label or "")

    def _spec(self, message: job_pb2.JobSpec, place: str) -> JobSpec:
        wrong = Violations()
        question = to_question(message.question, f"{place}.question", self._caps, wrong)
        budget = to_budget(message.budget, f"{place}.budget", self._caps, wrong)
        when_over = to_when_over(message.when_over, f"{place}.when_over", wrong)
        if not PRIORITIES[0] <= message.priority <= PRIORITIES[1]:
            wrong.add(f"{place}.priority", f"is {message.priority}; it must be from {PRIORITIES[0]} to {PRIORITIES[1]}")
        not_after = from_timestamp(message.not_after) if message.HasField("not_after") else None
        if message.HasField("not_after") and not_after is None:
            wrong.add(f"{place}.not_after", "is no time: seconds within the years 1 to 9999, nanos from 0 to 999999999")
        fault = label_fault(message.label)
        if fault is not None:
            wrong.add(f"{place}.label", fault)
        if message.input.WhichOneof("graph") is None:
            wrong.add(f"{place}.input", "names no graph; give graph_address or graph_content")
        if question is not None:
            _check_weighted(message.input.WhichOneof("weights"), question, f"{place}.input", wrong)
        wrong.settle()
        assert question is not None, "a missing question is settled above"
        graph, weights, names = (self._named(message, part, place) for part in _KINDS)
        assert graph is not None, "a missing graph is settled above"
        self._check_lengths(graph, weights, names, question, place)
        self._check_vertices(message, question, graph, place)
        return JobSpec(
            graph_address=graph.address,
            weights_address=weights.address if weights else None,
            names_address=names.address if names else None,
            question=question,
            budget=budget,
            when_over=when_over,
            priority=message.priority,
            not_after=not_after,
            label=message.label,
            inline=tuple(part.content for part in (graph, weights, names) if part and part.content),
        )

    def _named(self, message: job_pb2.JobSpec, part: str, place: str) -> _Named | None:
        which = message.input.WhichOneof(part)
        if which is None:
            return None
        field = f"{place}.input.{which}"
        value = getattr(message.input, which)
        if isinstance(value, str):
            return _Named(check_address(value, field), None)
        content = self._inline(_KINDS[part], value, field)
        setattr(message.input, f"{part}_address", content.address)
        return _Named(content.address, content)

    def _inline(self, kind: ContentKind, data: bytes, field: str) -> NewContent:
        key = kind, address_of(data)
        content = self._known.get(key)
        if content is None:
            content = self._known[key] = to_new_content(kind, data, field, key[1])
            self._carried += len(data)
        return content

    def _check_lengths(
        self, graph: _Named, weights: _Named | None, names: _Named | None, question: Question, place: str
    ) -> None:
        """Compare what came inline; the store does so for what it holds."""
        if graph.content is None:
            return
        n = graph.content.vertices
        wanted = question.weights_of(n)
        if weights and weights.content and weights.content.vertices != wanted:
            raise refuse(
                f"{place}.input.weights_content",
                f"has {weights.content.vertices} weights for {n} vertices; send one a vertex"
                + (f" for each of {question.scenarios} scenarios, {wanted} in all" if question.scenarios else ""),
            )
        if names and names.content and names.content.vertices != n:
            raise refuse(
                f"{place}.input.names_content",
                f"has {names.content.vertices} names for {n} vertices; send one a vertex",
            )

    def _check_vertices(self, message: job_pb2.JobSpec, question: Question, graph: _Named, place: str) -> None:
        if not depends_on_vertices(question):
            return
        vertices = graph.content.vertices if graph.content else self._vertices_stored(graph.address)
        if vertices is None:
            return
        wrong = Violations()
        check_vertices(message.question, question, vertices, f"{place}.question", wrong)
        wrong.settle()

    def _vertices_stored(self, address: str) -> int | None:
        if address not in self._stored_vertices:
            self._stored_vertices[address] = self._vertices_of(address)
        return self._stored_vertices[address]


def _check_weighted(given: str | None, question: Question, place: str, wrong: Violations) -> None:
    """Note weights that the question does not take, or their absence where it needs some."""
    if given is not None and not question.name.takes_weights:
        wrong.add(
            f"{place}.{given}",
            f"is given, but the question {question.name} is about the graph alone and takes no weights; leave it out",
        )
    if given is None and question.scenarios:
        wrong.add(
            place,
            f"has no weights, but the question has {question.scenarios} scenarios; give a weight a vertex for each "
            "of them, scenario by scenario",
        )


def _inline_bytes(message: job_pb2.JobSpec) -> int:
    given = message.input
    return len(given.graph_content) + len(given.weights_content) + len(given.names_content)
