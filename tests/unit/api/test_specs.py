"""What a submit may say: each wrong field by its place, what is wrong and what to do about it."""

from __future__ import annotations

import datetime as dt
import math
import struct
from collections.abc import Callable
from pathlib import Path

import pytest
from google.protobuf.timestamp_pb2 import Timestamp
from nearchord.v1 import job_pb2
from nearchord_service.api.convert.questions import from_question, to_question
from nearchord_service.api.convert.specs import SpecReader
from nearchord_service.api.convert.violations import Violations
from nearchord_service.api.limits import Caps
from nearchord_service.model.content import ContentKind
from nearchord_service.model.errors import ContentInvalid, FieldInvalid, QuotaExceeded
from nearchord_service.model.job import JobSpec, Submission
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.settings import Settings

STORED = "5a" * 32
TRIANGLE = struct.pack("<IQ4Q3I", 3, 3, 0, 2, 3, 3, 1, 2, 2)
CAPS = Caps.of(
    Settings(Path("unused"), largest_memory=2**33, pins=3, batch_jobs=3, inline_bytes=200, batch_bytes=2_000)
)


def vertices_of(address: str) -> int | None:
    return 5 if address == STORED else None


def valid() -> job_pb2.JobSpec:
    spec = job_pb2.JobSpec()
    spec.input.graph_content = TRIANGLE
    spec.question.independent_set.SetInParent()
    return spec


def read(*specs: job_pb2.JobSpec, request_id: str = "r", label: str | None = None, caps: Caps = CAPS) -> Submission:
    reader = SpecReader(caps, vertices_of)
    for at, spec in enumerate(specs):
        reader.add(spec, "spec" if label is None else f"specs[{at}]")
    return reader.submission("somebody", request_id, label)


def read_one(change: Callable[[job_pb2.JobSpec], object]) -> JobSpec:
    spec = valid()
    change(spec)
    return read(spec).specs[0]


def test_a_minimal_spec_gets_the_defaults() -> None:
    found = read_one(lambda spec: None)
    assert found.question == Question(QuestionName.INDEPENDENT_SET)
    assert found.budget == Budget(None, 10**7, 60.0, 2**30)
    assert (found.when_over, found.priority, found.not_after, found.label) == (WhenOver.BOUND, 0, None, "")
    (graph,) = found.inline
    assert (graph.kind, graph.vertices, graph.edges, graph.data) == (ContentKind.GRAPH, 3, 3, TRIANGLE)
    assert graph.address == found.graph_address


def test_everything_that_is_said_is_kept() -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        spec.input.weights_content = struct.pack("<3q", 1, 2, 3)
        spec.input.names_content = b"a\nb\nc\n"
        spec.question.vertex_cover.must.extend([2, 0])
        spec.question.vertex_cover.never.append(1)
        spec.budget.fill = 0
        spec.budget.states = 1
        spec.budget.seconds = 0.5
        spec.budget.memory_bytes = 1
        spec.when_over = 2  # type: ignore[assignment]
        spec.priority = -1_000
        spec.not_after.FromDatetime(dt.datetime(2031, 2, 3, 4, 5, 6, 789_000))
        spec.label = "north"

    found = read_one(change)
    assert found.question == Question(QuestionName.VERTEX_COVER, (0, 2), (1,))
    assert found.budget == Budget(0, 1, 0.5, 1)
    assert (found.when_over, found.priority, found.label) == (WhenOver.STOP, -1_000, "north")
    assert found.not_after == dt.datetime(2031, 2, 3, 4, 5, 6, 789_000, tzinfo=dt.UTC)
    assert [c.kind for c in found.inline] == [ContentKind.GRAPH, ContentKind.WEIGHTS, ContentKind.NAMES]
    assert (found.weights_address, found.names_address) == (found.inline[1].address, found.inline[2].address)


def pins(*must: int, never: tuple[int, ...] = ()) -> Callable[[job_pb2.JobSpec], None]:
    def change(spec: job_pb2.JobSpec) -> None:
        spec.question.independent_set.must.extend(must)
        spec.question.independent_set.never.extend(never)

    return change


def put(path: str, value: object) -> Callable[[job_pb2.JobSpec], None]:
    def change(spec: job_pb2.JobSpec) -> None:
        *way, name = path.split(".")
        message: object = spec
        for step in way:
            message = getattr(message, step)
        setattr(message, name, value)

    return change


def stamped(seconds: int, nanos: int) -> Callable[[job_pb2.JobSpec], None]:
    return lambda spec: spec.not_after.CopyFrom(Timestamp(seconds=seconds, nanos=nanos))


WRONG: list[tuple[Callable[[job_pb2.JobSpec], object], str, str]] = [
    (lambda s: s.ClearField("input"), "spec.input", "names no graph; give graph_address or graph_content"),
    (put("input.graph_address", "XY"), "spec.input.graph_address", "64 lower-case hexadecimal digits"),
    (put("input.weights_address", ""), "spec.input.weights_address", "64 lower-case hexadecimal digits"),
    (put("input.names_address", "AB" * 32), "spec.input.names_address", "64 lower-case hexadecimal digits"),
    (
        put("input.weights_content", bytes(16)),
        "spec.input.weights_content",
        "has 2 weights for 3 vertices; send one a vertex",
    ),
    (put("input.names_content", b"a\n"), "spec.input.names_content", "has 1 names for 3 vertices; send one a vertex"),
    (
        lambda s: s.ClearField("question"),
        "spec.question",
        "is missing or not known to this server; ask one of independent-set, vertex-cover, clique, colourable",
    ),
    (pins(0, 2, 0), "spec.question.independent_set.must[2]", "names vertex 0 again, after [0]; name it once"),
    (pins(never=(1, 1)), "spec.question.independent_set.never[1]", "names vertex 1 again, after [0]; name it once"),
    (pins(1, 3), "spec.question.independent_set.must[1]", "names vertex 3, but the graph has 3, numbered from 0 to 2"),
    (pins(never=(9,)), "spec.question.independent_set.never[0]", "names vertex 9, but the graph has 3"),
    (pins(0, 1, never=(0, 2)), "spec.question.independent_set", "pins 4 vertices, where 3 are allowed"),
    (put("budget.fill", -1), "spec.budget.fill", "is -1; it must be at least 0, or absent for the default"),
    (put("budget.states", 0), "spec.budget.states", "is 0; it must be at least 1, or absent for the default"),
    (put("budget.states", 10**9 + 1), "spec.budget.states", "is 1000000001, but this server allows at most 1000000000"),
    (put("budget.seconds", 0.0), "spec.budget.seconds", "is 0.0; it must be above 0, or absent for the default"),
    (put("budget.seconds", -2.0), "spec.budget.seconds", "is -2.0; it must be above 0"),
    (put("budget.seconds", math.nan), "spec.budget.seconds", "is not a number"),
    (put("budget.seconds", math.inf), "spec.budget.seconds", "is inf, but this server allows at most 3600.0"),
    (put("budget.memory_bytes", 0), "spec.budget.memory_bytes", "is 0; it must be at least 1"),
    (put("budget.memory_bytes", 2**34), "spec.budget.memory_bytes", "but this server allows at most 8589934592"),
    (put("when_over", 9), "spec.when_over", "is 9, which this server does not know; say BOUND or STOP"),
    (put("priority", 1_001), "spec.priority", "is 1001; it must be from -1000 to 1000"),
    (stamped(0, -1), "spec.not_after", "is no time"),
    (stamped(0, 10**9), "spec.not_after", "is no time"),
    (stamped(253_402_300_800, 0), "spec.not_after", "is no time"),
    (put("label", "x" * 201), "spec.label", "has 201 characters; shorten it to 200"),
    (put("label", "a\nb"), "spec.label", "holds the control character U+000A; remove it"),
]


GRAPH_ONLY = [name for name in QuestionName if not name.takes_weights]


@pytest.mark.parametrize("name", GRAPH_ONLY)
def test_questions_about_the_graph_alone_are_read(name: QuestionName) -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        getattr(spec.question, name).SetInParent()
        spec.budget.fill = 3

    found = read_one(change)
    assert (found.question, found.budget.fill) == (Question(name), 3)


@pytest.mark.parametrize("name", GRAPH_ONLY)
@pytest.mark.parametrize(
    ("field", "value"), [("weights_address", STORED), ("weights_content", struct.pack("<3q", 1, 1, 1))]
)
def test_questions_about_the_graph_alone_take_no_weights(name: QuestionName, field: str, value: str | bytes) -> None:
    """Not even unit weights; the violation stands beside the others of the request."""

    def change(spec: job_pb2.JobSpec) -> None:
        getattr(spec.question, name).SetInParent()
        setattr(spec.input, field, value)
        spec.priority = 5_000

    with pytest.raises(FieldInvalid) as caught:
        read_one(change)
    priority, weights = sorted(caught.value.violations, key=lambda v: v.field != "spec.priority")
    assert priority.field == "spec.priority"
    assert weights.field == f"spec.input.{field}"
    assert weights.description == (
        f"is given, but the question {name} is about the graph alone and takes no weights; leave it out"
    )


def test_the_written_question_is_the_one_read() -> None:
    """Every question of the model has a branch in the contract, and comes back as itself."""
    for name in QuestionName:
        add_ons = {field: True if field in ("prices", "conflict_prices", "count") else 3 for field in name.add_ons}
        for apart in ("limit", "scenarios"):
            add_ons.pop(apart, None)
        asked = Question(name, (0, 2), (1,), **add_ons) if name.chooses else Question(name)
        written = from_question(asked)
        assert written.WhichOneof("question") == name.value.replace("-", "_")
        assert to_question(written, "question", CAPS, Violations()) == asked


@pytest.mark.parametrize(("change", "field", "description"), WRONG, ids=[f"{f}-{d[:20]}" for _, f, d in WRONG])
def test_a_wrong_field_is_named(change: Callable[[job_pb2.JobSpec], object], field: str, description: str) -> None:
    with pytest.raises(FieldInvalid) as caught:
        read_one(change)
    assert type(caught.value) is FieldInvalid
    (violation,) = caught.value.violations
    assert violation.field == field
    assert description in violation.description


def test_an_infinite_budget_is_refused_where_nothing_is_capped() -> None:
    spec = valid()
    spec.budget.seconds = math.inf
    with pytest.raises(FieldInvalid, match=r"spec\.budget\.seconds: is infinite; name a finite number"):
        read(spec, caps=Caps.of(Settings(Path("unused"), largest_seconds=None)))


def test_all_wrong_fields_are_named_at_once() -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        spec.priority = 5_000
        spec.budget.fill = -1

    with pytest.raises(FieldInvalid) as caught:
        read_one(change)
    assert [v.field for v in caught.value.violations] == ["spec.budget.fill", "spec.priority"]


def test_wrong_content_is_named_by_its_place_in_the_batch() -> None:
    second = valid()
    second.input.weights_content = struct.pack("<3q", 1, -2, 3)
    with pytest.raises(ContentInvalid) as caught:
        read(valid(), second, label="")
    (violation,) = caught.value.violations
    assert violation.field == "specs[1].input.weights_content"
    assert violation.description == "vertex 1 weighs -2; weights are at least 0"


def test_pins_of_a_stored_graph_are_checked_against_it() -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        spec.input.graph_address = STORED
        spec.question.independent_set.must.append(5)

    with pytest.raises(FieldInvalid, match="names vertex 5, but the graph has 5, numbered from 0 to 4"):
        read_one(change)


def test_pins_of_a_graph_without_vertices_are_refused() -> None:
    def change(spec: job_pb2.JobSpec) -> None:
        spec.input.graph_content = struct.pack("<IQQ", 0, 0, 0)
        spec.question.independent_set.must.append(0)

    with pytest.raises(FieldInvalid, match="the graph has no vertices; leave the pin out"):
        read_one(change)


def test_too_much_inline_is_a_quota() -> None:
    with pytest.raises(QuotaExceeded) as caught:
        read_one(put("input.names_content", b"n" * 200))
    assert caught.value.subject == "spec.input"
    assert caught.value.retry_after is None
    assert "carries 256 bytes of content inline, where 200 are allowed; store it by StoreContent" in str(caught.value)


def test_too_many_jobs_in_a_batch_are_a_quota() -> None:
    with pytest.raises(QuotaExceeded, match="more than 3 jobs in one batch; split it"):
        read(*(valid() for _ in range(4)), label="")


def test_too_many_bytes_in_a_batch_are_a_quota() -> None:
    caps = Caps.of(Settings(Path("unused"), batch_bytes=100))
    with pytest.raises(QuotaExceeded, match="more than 100 bytes in one batch"):
        read(valid(), label="", caps=caps)


def test_equal_content_counts_once_in_a_batch() -> None:
    submission = read(*(valid() for _ in range(3)), label="")
    contents = [spec.inline[0] for spec in submission.specs]
    assert contents[0] is contents[1] is contents[2]


def fingerprint(*specs: job_pb2.JobSpec, label: str | None = None) -> bytes:
    return read(*specs, label=label).fingerprint


def test_the_fingerprint_tells_requests_apart() -> None:
    """A repetition has the same one; another spec, order, kind of request or label has not."""
    other = valid()
    other.priority = 1
    assert fingerprint(valid()) == fingerprint(valid())
    assert (
        len({fingerprint(valid()), fingerprint(other), fingerprint(valid(), label=""), fingerprint(valid(), label="x")})
        == 4
    )
    again, changed = valid(), valid()
    changed.priority = 1
    assert fingerprint(again, changed, label="") != fingerprint(changed, again, label="")


def test_the_fingerprint_does_not_ask_how_content_travelled() -> None:
    """A caller that sent a graph inline may repeat the request by its address."""
    by_address = valid()
    by_address.input.graph_address = read(valid()).specs[0].graph_address
    again = valid()
    again.input.graph_content = TRIANGLE
    assert fingerprint(again) == fingerprint(by_address)


def test_fields_of_newer_clients_are_left_alone() -> None:
    """An unknown field neither fails the call nor is forgotten in the fingerprint."""
    newer = job_pb2.JobSpec.FromString(valid().SerializeToString() + b"\xf8\x7f\x01")
    assert read(newer).specs == read(valid()).specs
    assert fingerprint(newer) != fingerprint(valid())
