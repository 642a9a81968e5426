"""Jobs as their owners see them: lists, cancels, answers, deletion; foreign owners see nothing."""

from __future__ import annotations

import struct

import pytest
from contract.stores import (
    ANN,
    BEN,
    LIMITS,
    Home,
    answer,
    claim_one,
    finish,
    give_back,
    graph,
    spec,
    submission,
    submit,
    submit_batch,
)
from nearchord_service.model.answer import Column, ElementType
from nearchord_service.model.errors import BatchNotDone, BatchUnknown, FieldInvalid, JobNotDone, JobUnknown
from nearchord_service.model.event import Reached
from nearchord_service.model.job import Job
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.port import Query, Store


def pages(store: Store, query: Query, owner: str = ANN) -> list[list[Job]]:
    found, token = [], None
    while True:
        page = store.jobs(owner, Query(query.batch_id, query.label, query.stage, query.page_size, token))
        found.append(list(page.jobs))
        if (token := page.next_token) is None:
            return found


def test_list_shows_the_latest_first(home: Home) -> None:
    store = home.open()
    made = [submit(store) for _ in range(5)]
    assert [[job.id for job in page] for page in pages(store, Query(page_size=2))] == [
        [made[4].id, made[3].id],
        [made[2].id, made[1].id],
        [made[0].id],
    ]
    assert len(pages(store, Query(page_size=5))) == 1


def test_pages_are_stable_while_jobs_arrive_and_move(home: Home) -> None:
    """Every job that was there at the first page is seen exactly once."""
    store = home.open()
    before = {submit(store).id for _ in range(6)}
    seen, token = [], None
    while True:
        page = store.jobs(ANN, Query(page_size=2, page_token=token))
        seen += [job.id for job in page.jobs]
        submit(store)
        finish(store, claim_one(store))
        if (token := page.next_token) is None:
            break
    assert len(seen) == 6
    assert set(seen) == before


def test_list_filters_by_batch_label_and_stage(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *(spec(label=label) for label in ("red", "blue", "red")))
    alone = submit(store, spec(label="red", priority=5))
    finish(store, claim_one(store))

    def indices(**query: object) -> list[tuple[str | None, int]]:
        return [
            (job.batch_id, job.batch_index)
            for page in pages(store, Query(page_size=1, **query))  # type: ignore[arg-type]
            for job in page
        ]

    assert indices(label="red") == [(None, 0), (batch.id, 2), (batch.id, 0)]
    assert indices(batch_id=batch.id) == [(batch.id, i) for i in range(3)]
    assert indices(batch_id=batch.id, label="red") == [(batch.id, 0), (batch.id, 2)]
    assert indices(label="red", stage=Stage.WAITING) == [(batch.id, 2), (batch.id, 0)]
    assert indices(stage=Stage.DONE) == [(None, 0)]
    assert store.job(ANN, alone.id).stage is Stage.DONE
    assert indices(label="green") == []


@pytest.mark.parametrize("token", ["", "x", "AAAA", "A" * 24, "ü"])
def test_invented_page_token_is_refused(home: Home, token: str) -> None:
    with pytest.raises(FieldInvalid, match="page_token: not a token of this query"):
        home.open().jobs(ANN, Query(page_token=token))


def test_page_token_serves_only_its_own_query(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *(spec(label="a") for _ in range(3)))
    token = store.jobs(ANN, Query(page_size=1)).next_token
    assert store.jobs(ANN, Query(page_size=3, page_token=token)).next_token is None
    for owner, query in (
        (BEN, Query(page_token=token)),
        (ANN, Query(label="a", page_token=token)),
        (ANN, Query(batch_id=batch.id, page_token=token)),
        (ANN, Query(stage=Stage.WAITING, page_token=token)),
    ):
        with pytest.raises(FieldInvalid, match="page_token"):
            store.jobs(owner, query)


def test_batch_counts_its_jobs_by_stage(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *[spec()] * 4, label="night")
    submit(store)
    finish(store, claim_one(store))
    claim_one(store)
    counted = store.batch(ANN, batch.id)
    assert (counted.jobs, counted.waiting, counted.solving, counted.done) == (4, 2, 1, 1)
    assert (counted.label, counted.owner, counted.created_at) == ("night", ANN, batch.created_at)


def test_cancelled_waiting_job_is_done_at_once(home: Home) -> None:
    store = home.open()
    job = store.cancel_job(ANN, submit(store).id)
    assert (job.stage, job.verdict, job.reason) == (Stage.DONE, Verdict.CANCELLED, "withdrawn by the client")
    assert (job.cancel_requested, job.finished_at) == (True, home.clock.now)
    assert store.claim("host", 1, 45) == ()
    assert store.answer(ANN, job.id)[1].verdict is Verdict.CANCELLED
    assert store.answer(ANN, job.id)[1].reason == job.reason


def test_cancelled_solving_job_is_marked_for_its_worker(home: Home) -> None:
    store = home.open()
    told: list[str] = []
    store.subscribe(lambda change: told.extend(change.cancels))
    job = submit(store)
    lease = claim_one(store)
    assert store.cancel_job(ANN, job.id).stage is Stage.SOLVING
    assert store.cancel_job(ANN, job.id).cancel_requested
    held = store.renew("host", [(job.id, lease.attempt)], 45)[job.id, lease.attempt]
    assert (held.held, held.cancel_requested) == (True, True)
    assert finish(store, lease, answer(Verdict.CANCELLED, reason="stopped in phase sweep"))
    ended = store.job(ANN, job.id)
    assert (ended.verdict, ended.reason) == (Verdict.CANCELLED, "stopped in phase sweep")
    assert set(told) == {job.id}


def test_answer_that_outran_a_cancel_counts(home: Home) -> None:
    store = home.open()
    job = submit(store)
    lease = claim_one(store)
    store.cancel_job(ANN, job.id)
    assert finish(store, lease)
    assert store.job(ANN, job.id).verdict is Verdict.PROVEN


def test_cancelled_done_job_stays_as_it_is(home: Home) -> None:
    store = home.open()
    job = submit(store)
    finish(store, claim_one(store))
    done = store.job(ANN, job.id)
    assert store.cancel_job(ANN, job.id) == done


def test_cancelled_batch_ends_with_its_workers(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *[spec()] * 4)
    other = submit(store)
    done, solving = store.claim("host", 2, 45)
    finish(store, done)
    cancelled = store.cancel_batch(ANN, batch.id)
    assert (cancelled.waiting, cancelled.solving, cancelled.done) == (0, 1, 3)
    assert store.cancel_batch(ANN, batch.id) == cancelled
    give_back(store, solving, worker_lost=False)
    verdicts = [job.verdict for job in store.jobs(ANN, Query(batch_id=batch.id)).jobs]
    assert verdicts == [Verdict.PROVEN, Verdict.CANCELLED, Verdict.CANCELLED, Verdict.CANCELLED]
    assert store.job(ANN, other.id).stage is Stage.WAITING


def test_answer_comes_back_exactly(home: Home) -> None:
    store = home.open()
    job = submit(store)
    finish(store, claim_one(store), answer())
    for source in (lambda: store, home.open):
        opened = source()
        done, read = opened.answer(ANN, job.id)
        assert read == answer()
        assert done == opened.job(ANN, job.id)


def test_bare_answer_comes_back_exactly(home: Home) -> None:
    bare = answer(
        Verdict.INFEASIBLE,
        value=None,
        bound=None,
        states=None,
        columns=(),
        proof_kinds=(),
        phase_seconds=(),
        recognition=None,
        structure=None,
        count=None,
    )
    store = home.open()
    job = submit(store)
    finish(store, claim_one(store), bare)
    assert store.answer(ANN, job.id)[1] == bare


@pytest.mark.parametrize("name", list(QuestionName))
def test_every_question_is_kept_and_claimed_as_asked(home: Home, name: QuestionName) -> None:
    add_ons = {field: True if field in ("prices", "conflict_prices", "count") else 3 for field in name.add_ons}
    asked = Question(name, must=(1,), never=(0, 2), **add_ons) if name.chooses else Question(name)
    job = submit(home.open(), spec(question=asked))
    opened = home.open()
    assert opened.job(ANN, job.id).question == asked
    assert claim_one(opened).job.question == asked


def test_large_answer_comes_back_exactly(home: Home) -> None:
    chosen = Column("chosen", ElementType.UINT32, struct.pack("<300000I", *range(300000)))
    store = home.open()
    job = submit(store)
    finish(store, claim_one(store), answer(columns=(chosen,)))
    assert store.answer(ANN, job.id)[1].columns == (chosen,)


def test_answer_of_an_unfinished_job_is_refused(home: Home) -> None:
    store = home.open()
    job = submit(store)
    with pytest.raises(JobNotDone):
        store.answer(ANN, job.id)
    claim_one(store)
    with pytest.raises(JobNotDone):
        store.answer(ANN, job.id)


def test_batch_answers_come_by_position(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, *(spec(priority=i) for i in range(4)))
    for lease in store.claim("host", 2, 45):
        finish(store, lease)
    rows = store.batch_answers(ANN, batch.id, -1, 10)
    assert [job.batch_index for job, _ in rows] == [0, 1, 2, 3]
    assert [found is None for _, found in rows] == [True, True, False, False]
    assert rows[3][1] == answer()
    assert [job.batch_index for job, _ in store.batch_answers(ANN, batch.id, 0, 2)] == [1, 2]


def test_deleted_job_is_gone_with_all_that_belongs_to_it(home: Home) -> None:
    store = home.open()
    request = submission()
    job = store.submit(request, LIMITS).job
    with pytest.raises(JobNotDone):
        store.delete_job(ANN, job.id)
    finish(store, claim_one(store))
    home.clock.advance(5)
    assert store.delete_job(ANN, job.id) == home.clock.now
    for ask in (
        lambda: store.job(ANN, job.id),
        lambda: store.answer(ANN, job.id),
        lambda: store.job_events(ANN, job.id, 0, 1),
        lambda: store.delete_job(ANN, job.id),
    ):
        with pytest.raises(JobUnknown):
            ask()
    assert store.submit(request, LIMITS).repeated is False


def test_deleted_batch_is_gone_with_its_jobs(home: Home) -> None:
    store = home.open()
    request = submission(spec(), spec(), batch=True)
    batch = store.submit(request, LIMITS).batch
    assert batch is not None
    ids = [job.id for job in store.jobs(ANN, Query(batch_id=batch.id)).jobs]
    finish(store, claim_one(store))
    with pytest.raises(BatchNotDone):
        store.delete_batch(ANN, batch.id)
    finish(store, claim_one(store))
    assert store.delete_batch(ANN, batch.id) == home.clock.now
    with pytest.raises(BatchUnknown):
        store.batch(ANN, batch.id)
    for job_id in ids:
        with pytest.raises(JobUnknown):
            store.job(ANN, job_id)
    assert store.submit(request, LIMITS).repeated is False


def test_batch_goes_with_its_last_job(home: Home) -> None:
    store = home.open()
    request = submission(spec(), spec(), batch=True)
    batch = store.submit(request, LIMITS).batch
    assert batch is not None
    first, second = (lease.job.id for lease in store.claim("host", 2, 45) if finish(store, lease))
    store.delete_job(ANN, first)
    assert store.batch(ANN, batch.id).jobs == 1
    assert store.submit(request, LIMITS).job.id == second
    store.delete_job(ANN, second)
    with pytest.raises(BatchUnknown):
        store.batch(ANN, batch.id)
    assert store.submit(request, LIMITS).repeated is False


def test_foreign_owner_sees_nothing(home: Home) -> None:
    store = home.open()
    batch = submit_batch(store, spec(graph(1)), spec(graph(2)))
    job = store.jobs(ANN, Query()).jobs[0]
    for lease in store.claim("host", 2, 45):
        finish(store, lease)
    for ask in (
        store.job,
        store.answer,
        store.cancel_job,
        store.delete_job,
        lambda owner, job_id: store.job_events(owner, job_id, 0, 10),
    ):
        with pytest.raises(JobUnknown, match=job.id):
            ask(BEN, job.id)
    for ask in (
        store.batch,
        store.cancel_batch,
        store.delete_batch,
        lambda owner, batch_id: store.batch_events(owner, batch_id, 0, 10),
        lambda owner, batch_id: store.batch_answers(owner, batch_id, -1, 10),
        lambda owner, batch_id: store.jobs(owner, Query(batch_id=batch_id)),
    ):
        with pytest.raises(BatchUnknown, match=batch.id):
            ask(BEN, batch.id)
    assert store.jobs(BEN, Query()).jobs == ()
    assert store.batch(ANN, batch.id).done == 2


def test_each_stage_change_is_an_event(home: Home) -> None:
    store = home.open()
    job = submit(store)
    give_back(store, claim_one(store), "worker died")
    finish(store, claim_one(store), answer(Verdict.BOUNDED, reason="seconds ran out"))
    events = store.job_events(ANN, job.id, 0, 10)
    assert [(event.attempt, event.news) for event in events] == [
        (0, Reached(Stage.WAITING, None, "accepted")),
        (1, Reached(Stage.SOLVING, None, "taken up by a worker")),
        (1, Reached(Stage.WAITING, None, "worker died")),
        (2, Reached(Stage.SOLVING, None, "taken up by a worker")),
        (2, Reached(Stage.DONE, Verdict.BOUNDED, "seconds ran out")),
    ]
    assert store.job(ANN, job.id).sequence == events[-1].sequence
