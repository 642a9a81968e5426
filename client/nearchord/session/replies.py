"""From the messages of the wire to what a caller sees."""

from __future__ import annotations

from datetime import UTC, datetime
from fractions import Fraction

from google.protobuf.message import Message
from google.protobuf.timestamp_pb2 import Timestamp

from nearchord.budget import Budget
from nearchord.errors import ServerFault
from nearchord.jobs import BatchInfo, Event, JobInfo, Progress
from nearchord.load import Load, QuestionLoad, ServerInfo, Slots
from nearchord.question import QUESTIONS, Choice, Question
from nearchord.stages import Phase, ProofKind, Stage, Verdict, WhenOver
from nearchord.v1 import answer_pb2, job_pb2, load_service_pb2, question_pb2

DEFAULT_COLOURS = 2

PROOF_KINDS = {
    answer_pb2.PROOF_KIND_UNSPECIFIED: ProofKind.NONE,
    answer_pb2.PROOF_KIND_CERTIFICATE: ProofKind.CERTIFICATE,
    answer_pb2.PROOF_KIND_SEARCH: ProofKind.SEARCH,
    answer_pb2.PROOF_KIND_PACKING: ProofKind.PACKING,
    answer_pb2.PROOF_KIND_BRANCH: ProofKind.BRANCH,
}


def job_info(job: job_pb2.Job) -> JobInfo:
    """A job."""
    return JobInfo(
        id=job.id,
        batch_id=job.batch_id,
        batch_index=job.batch_index,
        label=job.label,
        graph_address=job.graph_address,
        weights_address=job.weights_address,
        names_address=job.names_address,
        vertices=job.vertices,
        edges=job.edges,
        question=question(job.question),
        budget=budget(job.budget),
        when_over=when_over(job.when_over),
        priority=job.priority,
        not_after=moment(job, "not_after"),
        stage=stage(job.stage),
        verdict=verdict(job.verdict),
        reason=job.reason,
        attempt=job.attempt,
        cancel_requested=job.cancel_requested,
        created_at=moment(job, "created_at"),
        started_at=moment(job, "started_at"),
        finished_at=moment(job, "finished_at"),
        sequence=job.sequence,
    )


def batch_info(batch: job_pb2.Batch) -> BatchInfo:
    """A batch."""
    return BatchInfo(
        id=batch.id,
        label=batch.label,
        created_at=moment(batch, "created_at"),
        jobs=batch.jobs,
        waiting=batch.waiting,
        solving=batch.solving,
        done=batch.done,
    )


def event(row: job_pb2.Event) -> Event:
    """An event: a stage reached, or progress."""
    reached = row.transition if row.WhichOneof("kind") == "transition" else None
    return Event(
        sequence=row.sequence,
        job_id=row.job_id,
        batch_index=row.batch_index,
        time=moment(row, "time"),
        attempt=row.attempt,
        stage=None if reached is None else stage(reached.stage),
        verdict=None if reached is None else verdict(reached.verdict),
        reason="" if reached is None else reached.reason,
        progress=None if reached is not None else progress(row.progress),
    )


def progress(row: job_pb2.Progress) -> Progress:
    """How far a solve is."""
    return Progress(
        phase=phase(row.phase),
        fraction_done=row.fraction_done,
        fill=_known(row, "fill"),
        fill_lower_bound=_known(row, "fill_lower_bound"),
        bags_done=_known(row, "bags_done"),
        bags=_known(row, "bags"),
        states=_known(row, "states"),
        incumbent=_known(row, "incumbent"),
        bound=_known(row, "bound"),
        seconds=row.seconds,
    )


def server_info(reply: load_service_pb2.GetServerResponse) -> ServerInfo:
    """What a server is."""
    return ServerInfo(
        version=reply.version,
        solver_version=reply.solver_version,
        questions=tuple(reply.questions),
        default_budget=budget(reply.default_budget),
        largest_budget=budget(reply.largest_budget),
        inline_bytes=reply.inline_bytes,
        piece_bytes=reply.piece_bytes,
        content_bytes=reply.content_bytes,
        batch_jobs=reply.batch_jobs,
        unfinished_jobs=reply.unfinished_jobs,
    )


def load(reply: load_service_pb2.WatchLoadResponse) -> Load:
    """Live figures."""
    slots = reply.slots
    return Load(
        time=moment(reply, "time"),
        waiting=reply.waiting,
        solving=reply.solving,
        oldest_waiting_seconds=reply.oldest_waiting_seconds,
        slots=Slots(slots.warming, slots.idle, slots.busy, slots.warm_fraction),
        submitted=reply.submitted,
        finished=reply.finished,
        finished_per_second=reply.finished_per_second,
        watch_streams=reply.watch_streams,
        questions=tuple(
            QuestionLoad(q.question, verdict(q.verdict), q.finished, q.seconds_p50, q.seconds_p90, q.seconds_p99)
            for q in reply.questions
        ),
    )


def question(asked: question_pb2.Question) -> Question:
    """A question with its pins as numbers; ServerFault for one this client does not know."""
    field = asked.WhichOneof("question")
    kind = QUESTIONS.get((field or "").replace("_", "-"))
    if field is None or kind is None:
        raise ServerFault("the server speaks of a question that this client does not know; update the client")
    if not issubclass(kind, Choice):
        return kind()
    wire = getattr(asked, field)
    values = {name: _add_on(wire, name) for name in kind.add_ons()}
    return kind(must=tuple(wire.must), never=tuple(wire.never), **values)


def _add_on(wire: Message, name: str) -> bool | int | None:
    """A field of a question beside its pins; of scenarios it says how many there are."""
    if name == "limit":
        return _known(wire, name)
    value: bool | int = getattr(wire, name)
    return value or DEFAULT_COLOURS if name == "colours" else value


def budget(spent: question_pb2.Budget) -> Budget:
    """A budget; absent fields are None."""
    seconds = spent.seconds if spent.HasField("seconds") else None
    return Budget(_known(spent, "fill"), _known(spent, "states"), seconds, _known(spent, "memory_bytes"))


def when_over(word: question_pb2.WhenOver) -> WhenOver:
    """What happens when a budget does not suffice; unsaid means BOUND."""
    return WhenOver.STOP if word == question_pb2.WHEN_OVER_STOP else WhenOver.BOUND


def stage(word: job_pb2.Stage) -> Stage:
    """A stage."""
    return Stage(_name(job_pb2.Stage.Name(word), "STAGE_"))


def verdict(word: job_pb2.Verdict) -> Verdict | None:
    """A verdict; None while there is none."""
    return None if not word else Verdict(_name(job_pb2.Verdict.Name(word), "VERDICT_"))


def phase(word: job_pb2.Phase) -> Phase | None:
    """A phase; None before the first."""
    return None if not word else Phase(_name(job_pb2.Phase.Name(word), "PHASE_"))


def rational(wire: answer_pb2.Rational) -> int | Fraction:
    """An exact value, an int where it is whole."""
    value = Fraction(wire.numerator, wire.denominator or 1)
    return value.numerator if value.denominator == 1 else value


def moment(message: Message, field: str) -> datetime | None:
    """A time stamp in UTC; None where the field is absent."""
    if not message.HasField(field):
        return None
    stamp: Timestamp = getattr(message, field)
    return stamp.ToDatetime(tzinfo=UTC)


def _known(message: Message, field: str) -> int | None:
    return int(getattr(message, field)) if message.HasField(field) else None


def _name(word: str, prefix: str) -> str:
    return word.removeprefix(prefix)
