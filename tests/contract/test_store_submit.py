"""Submitting: all or nothing, once for each request id, within limits."""

from __future__ import annotations

import dataclasses

import pytest
from contract.stores import ANN, BEN, LIMITS, Home, graph, names, spec, submission, submit, weights
from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.errors import ContentUnknown, FieldInvalid, QuotaExceeded, RequestIdReused
from nearchord_service.model.event import Reached
from nearchord_service.model.question import Question, QuestionName, WhenOver
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Limits, Query


def test_accepted_job_is_there_as_submitted(home: Home) -> None:
    """Every field of the spec comes back, with the figures of its graph."""
    store = home.open()
    parts = (graph(), weights(), names())
    asked = spec(
        parts[0],
        weights_address=parts[1].address,
        names_address=parts[2].address,
        when_over=WhenOver.STOP,
        priority=-7,
        not_after=home.clock.now.replace(microsecond=123456, year=2032),
        label="züge/7",
        inline=parts,
    )
    accepted = store.submit(submission(asked), LIMITS)
    job = store.job(ANN, accepted.job.id)
    assert (accepted.job, accepted.batch, accepted.repeated) == (job, None, False)
    for name in ("graph_address", "weights_address", "names_address", "question", "budget", "when_over"):
        assert getattr(job, name) == getattr(asked, name)
    assert (job.priority, job.not_after, job.label) == (-7, asked.not_after, "züge/7")
    assert (job.vertices, job.edges, job.owner, job.batch_id, job.batch_index) == (3, 2, ANN, None, 0)
    assert (job.stage, job.verdict, job.attempt, job.cancel_requested) == (Stage.WAITING, None, 0, False)
    assert (job.created_at, job.started_at, job.finished_at) == (home.clock.now, None, None)
    assert len(job.id) == 32


def test_accepted_job_has_its_first_event(home: Home) -> None:
    store = home.open()
    job = submit(store)
    (event,) = store.job_events(ANN, job.id, 0, 10)
    assert event.news == Reached(Stage.WAITING, None, "accepted")
    assert (event.sequence, event.job_id, event.time, event.attempt) == (job.sequence, job.id, home.clock.now, 0)


def test_batch_keeps_the_order_of_its_specs(home: Home) -> None:
    store = home.open()
    accepted = store.submit(submission(*(spec(label=f"part {i}") for i in range(5)), batch=True, label="all"), LIMITS)
    assert accepted.batch is not None
    assert (accepted.batch.jobs, accepted.batch.waiting, accepted.batch.label) == (5, 5, "all")
    listed = store.jobs(ANN, Query(batch_id=accepted.batch.id)).jobs
    assert [(job.label, job.batch_index) for job in listed] == [(f"part {i}", i) for i in range(5)]
    assert listed[0] == accepted.job
    assert {job.batch_id for job in listed} == {accepted.batch.id}


def test_inline_content_is_stored_with_its_job(home: Home) -> None:
    store = home.open()
    large = graph(1, padding=1 << 20)
    submit(store, spec(graph(0)), owner=ANN)
    submit(store, spec(large), owner=ANN)
    assert store.content_bytes(ANN, graph(0).address).data == graph(0).data
    stored = store.content_bytes(ANN, large.address)
    assert (stored.data or stored.path.read_bytes()) == large.data  # type: ignore[union-attr]
    assert store.content(ANN, large.address).size_bytes == len(large.data)


def test_repeated_request_returns_what_was_accepted(home: Home) -> None:
    store = home.open()
    single, batch = submission(request_id="one"), submission(spec(), spec(), batch=True, request_id="two")
    first, second = store.submit(single, LIMITS), store.submit(batch, LIMITS)
    for sent, accepted in ((single, first), (batch, second)):
        again = store.submit(sent, Limits(0, 0))
        assert again == dataclasses.replace(accepted, repeated=True)
    assert store.figures().waiting == 3
    assert home.open().submit(single, LIMITS).job == first.job


def test_request_id_with_other_content_is_refused(home: Home) -> None:
    store = home.open()
    store.submit(submission(request_id="same"), LIMITS)
    with pytest.raises(RequestIdReused, match="same"):
        store.submit(submission(spec(priority=1), request_id="same"), LIMITS)
    assert store.submit(submission(spec(priority=1), request_id="same", owner=BEN), LIMITS).repeated is False


@pytest.mark.parametrize(
    ("bad", "error", "text"),
    [
        (spec("0" * 64), ContentUnknown, "0" * 64),
        (spec(weights_address=graph().address), FieldInvalid, r"specs\[1\]\.input\.weights_address: .* kind weights"),
        (
            spec(names_address=names(vertices=4).address, inline=(graph(), names(vertices=4))),
            FieldInvalid,
            r"specs\[1\]\.input\.names_address: .* 4 entries, the graph 3 vertices; give one a vertex$",
        ),
        (
            spec(weights_address=weights(entries=6).address, inline=(graph(), weights(entries=6))),
            FieldInvalid,
            r"specs\[1\]\.input\.weights_address: .* 6 entries, the graph 3 vertices; give one a vertex$",
        ),
        (
            spec(
                question=Question(QuestionName.INDUCED_FOREST, scenarios=2),
                weights_address=weights().address,
                inline=(graph(), weights()),
            ),
            FieldInvalid,
            r"weights_address: .* 3 entries, the graph 3 vertices; give one .* for each of 2 scenarios, 6 in all$",
        ),
    ],
)
def test_bad_spec_leaves_nothing_behind(home: Home, bad: object, error: type[Exception], text: str) -> None:
    """The good specs of the same batch and their inline content are not stored either."""
    store = home.open()
    good = graph(9, padding=1 << 20)
    with pytest.raises(error, match=text):
        store.submit(submission(spec(good), bad, batch=True), LIMITS)  # type: ignore[arg-type]
    with pytest.raises(ContentUnknown):
        store.content(ANN, good.address)
    assert store.figures().waiting == 0
    assert store.jobs(ANN, Query()).jobs == ()


def test_scenarios_have_as_many_vectors_and_one_list_of_names(home: Home) -> None:
    """Inline first, then by address alone."""
    store = home.open()
    parts = (graph(), weights(entries=6), names())
    told = {
        "question": Question(QuestionName.INDUCED_FOREST, scenarios=2),
        "weights_address": parts[1].address,
        "names_address": parts[2].address,
    }
    submit(store, spec(**told, inline=parts))
    submit(store, spec(parts[0].address, **told))
    assert store.figures().waiting == 2


def test_single_job_names_its_field_without_an_index(home: Home) -> None:
    with pytest.raises(FieldInvalid, match=r"spec\.input\.weights_address"):
        submit(home.open(), spec(weights_address=graph().address))


def test_content_of_another_owner_cannot_be_named(home: Home) -> None:
    store = home.open()
    submit(store, spec(graph(5)), owner=ANN)
    with pytest.raises(ContentUnknown):
        submit(store, spec(graph(5).address), owner=BEN)
    submit(store, spec(graph(5).address), owner=ANN)


def test_one_address_cannot_be_two_kinds(home: Home) -> None:
    store = home.open()
    submit(store, spec(graph(5)))
    masked = NewContent(graph(5).address, ContentKind.WEIGHTS, graph(5).data, 3, 0)
    with pytest.raises(FieldInvalid, match="stored as graph"):
        submit(store, spec(graph(6), weights_address=masked.address, inline=(graph(6), masked)))


def test_unfinished_jobs_are_limited_for_each_owner(home: Home) -> None:
    store = home.open()
    limits = Limits(3, 1 << 20)
    store.submit(submission(spec(), spec(), batch=True), limits)
    with pytest.raises(QuotaExceeded, match=r"unfinished jobs.* limit of 3") as caught:
        store.submit(submission(spec(), spec(), batch=True), limits)
    assert caught.value.retry_after is not None
    store.submit(submission(spec(), spec(), batch=True, owner=BEN), limits)
    store.cancel_job(ANN, store.jobs(ANN, Query()).jobs[0].id)
    store.submit(submission(spec(), spec(), batch=True), limits)
    with pytest.raises(QuotaExceeded) as caught:
        store.submit(submission(*[spec()] * 4, batch=True, owner="eve"), limits)
    assert caught.value.retry_after is None


def test_stored_bytes_are_limited_for_each_owner(home: Home) -> None:
    store = home.open()
    size = len(graph().data)
    limits = Limits(100, 2 * size)
    store.submit(submission(spec(graph(0)), spec(graph(1)), spec(graph(0)), batch=True), limits)
    with pytest.raises(QuotaExceeded, match="stored content"):
        store.submit(submission(spec(graph(2))), limits)
    store.submit(submission(spec(graph(1))), limits)
    store.submit(submission(spec(graph(2)), owner=BEN), limits)


def test_large_batch_is_accepted_whole(home: Home) -> None:
    store = home.open()
    accepted = store.submit(submission(*(spec(graph(i)) for i in range(3000)), batch=True), LIMITS)
    assert accepted.batch is not None
    assert store.batch(ANN, accepted.batch.id).waiting == 3000
    events = store.batch_events(ANN, accepted.batch.id, 0, 5000)
    assert [event.batch_index for event in events] == list(range(3000))


def test_submission_without_jobs_is_refused(home: Home) -> None:
    with pytest.raises(FieldInvalid, match="at least one job"):
        home.open().submit(dataclasses.replace(submission(), specs=()), LIMITS)
