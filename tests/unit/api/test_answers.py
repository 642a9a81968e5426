"""Answers: a head and its columns, alone or for a whole batch."""

from __future__ import annotations

import struct
from typing import Any

from nearchord.v1 import answer_pb2, job_pb2
from nearchord.v1 import job_service_pb2 as pb
from nearchord_service.model.answer import (
    Column,
    ElementType,
    Prediction,
    ProofKind,
    Recognition,
    StructureReport,
)
from nearchord_service.model.event import Phase
from nearchord_service.model.stage import Verdict
from nearchord_service.work.outcome import COUNT_DIGITS
from unit.api.serving import DEADLINE, Serving, a_spec, an_answer, failure


def parts(responses: Any) -> list[answer_pb2.AnswerPart]:
    return [response.part for response in responses]


def test_an_answer_is_a_head_and_its_columns(served: Serving) -> None:
    spec = a_spec(label="north")
    spec.budget.fill = 4
    spec.input.names_content = b"a\nb\nc\n"
    job = served.submit(spec)
    found = failure(lambda: served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (*found.summary, found.others) == ("FAILED_PRECONDITION", "JOB_NOT_DONE", (job.id,))
    (lease,) = served.claim()
    answer = an_answer(fill=1, fill_lower_bound=0, phase_seconds=((Phase.READ, 0.1), (Phase.SWEEP, 0.15)))
    served.finish(lease, answer)
    head, column = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (head.head.job_id, head.head.label, head.head.verdict) == (job.id, "north", job_pb2.VERDICT_PROVEN)
    assert (head.head.value.numerator, head.head.value.denominator) == (1, 1)
    assert (head.head.fill, head.head.fill_lower_bound, head.head.HasField("states")) == (1, 0, False)
    assert (head.head.proof, head.head.vertices) == (answer_pb2.PROOF_KIND_SEARCH, 3)
    assert head.head.names_address == job.names_address
    origin = head.head.provenance
    assert (origin.graph_address, origin.weights_address) == (job.graph_address, "")
    assert (origin.solver_version, origin.attempt, origin.budget.fill, origin.seconds) == ("4.5.6", 1, 4, 0.25)
    assert [(p.phase, p.seconds) for p in origin.phases] == [(job_pb2.PHASE_READ, 0.1), (job_pb2.PHASE_SWEEP, 0.15)]
    assert origin.wait_seconds >= 0
    assert origin.HasField("finished_at")
    assert [(c.name, c.type, c.length) for c in head.head.columns] == [("chosen", answer_pb2.ELEMENT_TYPE_UINT32, 1)]
    assert (column.column.name, column.column.offset, column.column.data) == ("chosen", 0, struct.pack("<I", 1))


def test_classes_and_structure_come_with_the_head(served: Serving) -> None:
    """What was not settled is absent, which is not the same as no; other questions have neither part."""
    plain, rich = served.submit(request_id="plain"), served.submit(request_id="rich")
    report = StructureReport(2, 9, (Prediction("colourable-subgraph", 2, 10**12, True, 2**40, False),))
    kinds = (ProofKind.PACKING, ProofKind.BRANCH, ProofKind.SEARCH)
    answers = {
        plain.id: an_answer(),
        rich.id: an_answer(recognition=Recognition(False, None, True, 0), structure=report, proof_kinds=kinds),
    }
    for lease in served.claim(2):
        served.finish(lease, answers[lease.job.id])
    head, *_ = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=rich.id)))
    found = head.head.recognition
    assert {field.name: value for field, value in found.ListFields()} == {
        "chordal": False,
        "split": True,
        "splittance": 0,
    }
    structure = head.head.structure
    assert (structure.components, structure.largest_core) == (2, 9)
    (one,) = structure.predictions
    assert (one.question, one.colours, one.states, one.at_least) == ("colourable-subgraph", 2, 10**12, True)
    assert (one.memory_bytes, one.fits) == (2**40, False)
    assert list(head.head.proof_kinds) == [
        answer_pb2.PROOF_KIND_PACKING,
        answer_pb2.PROOF_KIND_BRANCH,
        answer_pb2.PROOF_KIND_SEARCH,
    ]
    head, *_ = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=plain.id)))
    assert not head.head.HasField("recognition")
    assert not head.head.HasField("structure")


def test_a_count_of_any_size_comes_with_the_head(served: Serving) -> None:
    """A head fits into a message even with the longest count; without one the field is absent."""
    counted, plain = served.submit(request_id="counted"), served.submit(request_id="plain")
    answers = {counted.id: an_answer(count="9" * COUNT_DIGITS), plain.id: an_answer()}
    for lease in served.claim(2):
        served.finish(lease, answers[lease.job.id])
    head, *_ = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=counted.id)))
    assert head.head.count == "9" * COUNT_DIGITS
    head, *_ = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=plain.id)))
    assert not head.head.HasField("count")


def test_long_columns_come_in_pieces_of_whole_elements(served: Serving) -> None:
    job = served.submit()
    (lease,) = served.claim()
    columns = (
        Column("chosen", ElementType.UINT32, bytes(range(256)) * 10_000),
        Column("empty", ElementType.UINT32, b""),
        Column("price", ElementType.INT64, bytes(range(255, -1, -1)) * 5_000),
    )
    served.finish(lease, an_answer(columns=columns))
    head, *chunks = (part for part in parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id))))
    assert [(c.name, c.length) for c in head.head.columns] == [("chosen", 640_000), ("empty", 0), ("price", 160_000)]
    joined: dict[str, bytes] = {"empty": b""}
    for chunk in (c.column for c in chunks):
        size = 8 if chunk.name == "price" else 4
        assert chunk.offset * size == len(joined.setdefault(chunk.name, b""))
        assert len(chunk.data) <= 2**20
        joined[chunk.name] += chunk.data
    assert joined == {column.name: column.data for column in columns}


def heads(served: Serving, batch_id: str, **options: Any) -> Any:
    request = pb.ReadBatchAnswersRequest(batch_id=batch_id, **options)
    responses = served.jobs.ReadBatchAnswers(request, timeout=DEADLINE)
    return (response.part.head for response in responses if response.part.HasField("head"))


def jobs_of(served: Serving, batch_id: str) -> Any:
    return served.jobs.ListJobs(pb.ListJobsRequest(batch_id=batch_id, page_size=1_000)).jobs


def test_answers_of_a_batch_come_by_position(served: Serving) -> None:
    """Without waiting, jobs that have not ended are left out, as deleted ones are; any position can be the first."""
    batch = served.submit_batch(a_spec() for _ in range(40)).batch
    for lease in reversed(served.claim(40)):
        if lease.job.batch_index != 7:
            served.finish(lease, an_answer([lease.job.batch_index % 3]))
    (gone,) = [job.id for job in jobs_of(served, batch.id) if job.batch_index == 20]
    served.jobs.DeleteJob(pb.DeleteJobRequest(job_id=gone))
    indices = [i for i in range(40) if i not in (7, 20)]
    assert [head.batch_index for head in heads(served, batch.id)] == indices
    assert [head.batch_index for head in heads(served, batch.id, after_index=0)] == indices[1:]
    assert [head.batch_index for head in heads(served, batch.id, after_index=38)] == [39]
    assert list(heads(served, batch.id, after_index=39)) == []


def test_reading_answers_can_wait_for_each_job(served: Serving) -> None:
    batch = served.submit_batch(a_spec() for _ in range(6)).batch
    leases = served.claim(6)
    found = heads(served, batch.id, wait=True)
    for lease in (leases[0], leases[2], leases[1]):
        served.finish(lease)
    assert [next(found).batch_index for _ in range(3)] == [0, 1, 2]
    for lease in leases[:2:-1]:
        served.finish(lease)
    assert [head.batch_index for head in found] == [3, 4, 5]


def test_a_cancelled_job_has_an_answer_without_columns(served: Serving) -> None:
    job = served.submit()
    served.jobs.CancelJob(pb.CancelJobRequest(job_id=job.id))
    (head,) = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert (head.head.verdict, head.head.HasField("value")) == (job_pb2.VERDICT_CANCELLED, False)
    assert head.head.reason
    assert head.head.provenance.attempt == 0


def test_verdicts_without_values_are_told(served: Serving) -> None:
    job = served.submit()
    (lease,) = served.claim()
    served.finish(
        lease, an_answer(verdict=Verdict.INFEASIBLE, reason="0 and 1 are adjacent", value=None, bound=None, columns=())
    )
    (head,) = parts(served.jobs.ReadAnswer(pb.ReadAnswerRequest(job_id=job.id)))
    assert head.head.verdict == job_pb2.VERDICT_INFEASIBLE
    assert not head.head.HasField("bound")
