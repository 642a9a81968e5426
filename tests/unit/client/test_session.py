"""Both shells against a service in memory that breaks on purpose."""

from __future__ import annotations

import asyncio
import inspect

import nearchord
import numpy as np
import pytest
from nearchord.session import content
from nearchord.v1 import answer_pb2, job_pb2, question_pb2
from unit.client.fake_service import FakeService, answer_parts, column_parts, progress, served, transition

DONE = transition(9, job_pb2.STAGE_DONE, job_pb2.VERDICT_PROVEN, "value and bound meet")


class Blocking:
    """Uses the blocking shell."""

    def __init__(self, target, **options):
        self.service = nearchord.connect(target, **options)

    def call(self, value):
        """What a call gives."""
        return value

    def items(self, iterator, limit=None):
        """What an iterator gives, up to a limit."""
        found = []
        for item in iterator:
            found.append(item)
            if len(found) == limit:
                iterator.close()
                break
        return found

    def close(self):
        self.service.close()


class Awaiting(Blocking):
    """Uses the asyncio shell, on a loop of its own."""

    def __init__(self, target, **options):
        self.loop = asyncio.new_event_loop()
        self.service = self.loop.run_until_complete(self._connect(target, options))

    async def _connect(self, target, options):
        return nearchord.connect_async(target, **options)

    def call(self, value):
        return self.loop.run_until_complete(value) if inspect.isawaitable(value) else value

    def items(self, iterator, limit=None):
        async def gather():
            found = []
            async for item in iterator:
                found.append(item)
                if len(found) == limit:
                    await iterator.aclose()
                    break
            return found

        return self.loop.run_until_complete(gather())

    def close(self):
        self.loop.run_until_complete(self.service.close())
        self.loop.close()


@pytest.fixture
def fake():
    return FakeService()


@pytest.fixture(params=[Blocking, Awaiting], ids=["sync", "asyncio"])
def user(request, fake):
    with served(fake) as target:
        user = request.param(target)
        yield user
        user.close()


def small():
    return nearchord.Graph.from_edges(3, [(0, 1), (1, 2)], weights=[1, 5, 1], names=["a", "b", "c"])


def large(n=40_000):
    return nearchord.Graph.from_arrays(n, range(n - 1), range(1, n))


def test_submit_sends_a_small_graph_inline(user, fake):
    """Graph, weights, names and named pins travel with the job, in one call."""
    job = user.call(
        user.service.submit(
            small(),
            nearchord.IndependentSet(must=["a"], never=[1]),
            budget=nearchord.Budget(fill=0, seconds=2),
            when_over="stop",
            priority=7,
            label="x",
        )
    )
    spec = fake.seen["spec"][0]
    assert job.id == "job0"
    assert spec.input.graph_content == b"".join(small().canonical())
    assert spec.input.weights_content == b"".join(int(w).to_bytes(8, "little") for w in (1, 5, 1))
    assert spec.input.names_content == b"a\nb\nc\n"
    assert list(spec.question.independent_set.must) == [0]
    assert list(spec.question.independent_set.never) == [1]
    assert (spec.budget.fill, spec.budget.HasField("fill"), spec.budget.HasField("states")) == (0, True, False)
    assert (spec.when_over, spec.priority, spec.label) == (2, 7, "x")
    assert fake.calls == {"SubmitJob": 1}


@pytest.mark.parametrize("question", [nearchord.Fill(), nearchord.Structure()])
def test_questions_about_the_graph_alone_travel_without_its_weights(user, fake, question):
    """Inline, stored or by address, alone or in a batch: such a question takes none, so none are sent."""
    stored = nearchord.Addresses("0" * 64, "1" * 64)
    fake.contents = {"0" * 64: b"", "1" * 64: b""}
    user.call(user.service.submit(small(), question))
    user.call(user.service.submit(large().with_weights(np.ones(40_000, np.int64)), question))
    user.call(user.service.submit(stored, question))
    user.call(user.service.submit_batch([nearchord.JobRequest(small(), question)]))
    specs = [*fake.seen["spec"], fake.seen["batch"][0][1][0]]
    assert len(specs) == 4
    assert [spec.input.WhichOneof("weights") for spec in specs] == [None] * 4
    assert {spec.question.WhichOneof("question") for spec in specs} == {question.name}
    assert specs[0].input.names_content == b"a\nb\nc\n"


def test_submit_under_one_request_id_gives_one_job(user, fake):
    """A caller's own request id makes a repetition harmless."""
    ids = {user.call(user.service.submit(small(), nearchord.VertexCover(), request_id="r")).id for _ in range(2)}
    assert ids == {"job0"}


def test_a_large_graph_is_stored_in_pieces_and_named_by_address(user, fake):
    """What exceeds the server's cap is uploaded in pieces no larger than the server takes."""
    fake.inline_bytes = 100_000
    graph = large()
    user.call(user.service.submit(graph, nearchord.IndependentSet()))
    assert fake.seen["spec"][0].input.graph_address == graph.address
    assert fake.contents[graph.address] == b"".join(graph.canonical())
    user.call(user.service.submit(graph, nearchord.IndependentSet()))
    assert fake.calls["StoreContent"] == 1
    assert fake.calls["GetUpload"] == 1


def test_what_another_session_has_stored_is_not_sent_again(user, fake):
    """The server is asked first."""
    graph = large(20_000)
    fake.contents[graph.address] = b"".join(graph.canonical())
    assert user.call(user.service.upload(graph)).graph == graph.address
    assert "StoreContent" not in fake.calls


def test_a_broken_upload_goes_on_where_it_broke(user, fake):
    """After each break the committed offset is asked for and nothing is sent twice."""
    fake.breaks["StoreContent"] = [3, 2, None]
    graph = large(2_000)
    addresses = user.call(user.service.upload(graph))
    assert addresses == nearchord.Addresses(graph.address)
    assert fake.seen["offset"] == [0, 2012, 4012]  # the header and two pieces of 1000, then two more


def test_all_content_of_a_graph_is_stored_though_every_stream_breaks(user, fake):
    """Weights, names and graph go side by side; each goes on by itself after its breaks."""
    fake.breaks["StoreContent"] = [1, 1, 1, 0, None, 2]
    n = 1_000
    graph = nearchord.Graph.from_arrays(n, range(n - 1), range(1, n), range(n), map(str, range(n)))
    addresses = user.call(user.service.upload(graph))
    assert addresses.graph == graph.address
    assert fake.contents[addresses.graph] == b"".join(graph.canonical())
    assert fake.contents[addresses.weights] == np.arange(n, dtype="<i8").tobytes()
    assert fake.contents[addresses.names] == "".join(f"{name}\n" for name in range(n)).encode()


def test_a_refusal_of_one_content_ends_the_others(user, fake):
    """The weights are refused while the graph is held up on its way; the call ends, and with it the graph's stream."""
    fake.gate.clear()
    graph = large(2_000).with_weights(range(2_000))
    fake.refused.add(content.content_of(graph).weights.address)
    with pytest.raises(nearchord.Rejected, match="refused"):
        user.call(user.service.upload(graph))
    assert fake.left.wait(10)


def test_stored_content_that_is_gone_is_stored_anew(user, fake):
    """A session that believes content stored learns better from the server, once."""
    fake.inline_bytes = 0
    graph = large(20_000)
    user.call(user.service.submit(graph, nearchord.IndependentSet()))
    fake.contents.clear()
    fake.partial.clear()
    user.call(user.service.submit(graph, nearchord.IndependentSet()))
    assert graph.address in fake.contents
    assert fake.calls["StoreContent"] == 2


def test_an_unknown_address_of_the_caller_is_reported(user, fake):
    """Addresses given by the caller cannot be stored anew here."""
    with pytest.raises(nearchord.NotFound, match="no content 00"):
        user.call(user.service.submit(nearchord.Addresses("00"), nearchord.IndependentSet()))


def test_a_broken_batch_is_repeated_whole_under_its_request_id(user, fake):
    """The stream breaks twice; the third carries every job, and only one batch exists."""
    fake.breaks["SubmitBatch"] = [0, 2]
    items = [nearchord.JobRequest(small(), nearchord.IndependentSet(), label=str(i)) for i in range(4)]
    batch = user.call(user.service.submit_batch(items, label="night"))
    ((_, specs),) = fake.seen["batch"]
    assert [spec.label for spec in specs] == ["0", "1", "2", "3"]
    assert batch.id == "b0"
    assert fake.calls["SubmitBatch"] == 3


def test_a_batch_names_the_item_that_is_wrong(user):
    """A wrong pin says in which item it stands, before anything is sent."""
    items = [nearchord.JobRequest(small(), nearchord.IndependentSet(must=[v])) for v in (0, 3)]
    with pytest.raises(nearchord.BadInput, match="item 1 of the batch: must has vertex 3, which does not exist"):
        user.call(user.service.submit_batch(items))


@pytest.mark.parametrize("items", [[], [1]], ids=["none", "no request"])
def test_a_batch_needs_requests(user, items):
    """An empty batch, or one of other things, is refused here."""
    with pytest.raises(nearchord.BadInput, match="batch"):
        user.call(user.service.submit_batch(items))


def test_a_watch_resumes_from_its_cursor(user, fake):
    """The stream breaks in the middle; every event arrives once, in order."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING), transition(5, 2), progress(7, bags=4, bags_done=1), DONE]
    fake.breaks["WatchJob"] = [2, 1]
    events = user.items(user.service.job("j").watch())
    assert [event.sequence for event in events] == [2, 5, 7, 9]
    assert fake.seen["after"] == [0, 5, 7]
    assert events[2].progress.phase is nearchord.Phase.SWEEP
    assert (events[2].progress.bags, events[2].progress.states) == (4, None)
    assert events[3].final
    assert events[3].verdict is nearchord.Verdict.PROVEN


def test_a_watch_begins_after_a_number(user, fake):
    """Events up to the number given are not sent again."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING), transition(5, 2), DONE]
    assert [event.sequence for event in user.items(user.service.batch("b").watch(after=2))] == [5, 9]


def test_an_abandoned_watch_ends_its_call(user, fake):
    """Leaving the loop cancels the stream, so that the server does not go on for nobody."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING)]
    fake.gate.clear()
    assert len(user.items(user.service.job("j").watch(), limit=1)) == 1
    assert fake.left.wait(20)


def test_an_answer_is_waited_for_and_assembled(user, fake):
    """Events are followed to the end, then head and pieces become one answer, also when the stream breaks in it."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING), DONE]
    fake.parts = list(answer_parts(0, [1, 4, 6, 7, 9], fill=0))
    fake.breaks["ReadAnswer"] = [2]
    answer = user.call(user.service.job("j").answer())
    assert answer.chosen.tolist() == [1, 4, 6, 7, 9]
    assert (answer.value, answer.bound, answer.fill, answer.states) == (5, 5, 0, None)
    assert answer.verdict is nearchord.Verdict.PROVEN
    assert answer.proof is nearchord.ProofKind.NONE
    assert not answer.chosen.flags.writeable


def test_a_fill_is_assembled_with_its_columns_and_classes(user, fake):
    """Pairs are rows, what was not settled is None, and nothing can be changed."""
    columns = {
        "fill_edge": np.array([0, 2, 1, 4], np.uint32),
        "core_start": np.array([0, 4, 9], np.int64),
        "split_clique": np.zeros(0, np.uint32),
    }
    fake.events = [transition(2, job_pb2.STAGE_WAITING), DONE]
    fake.parts = list(
        column_parts(
            columns,
            question=question_pb2.Question(fill=question_pb2.Fill()),
            verdict=job_pb2.VERDICT_OVER_FILL,
            proof=answer_pb2.PROOF_KIND_CERTIFICATE,
            proof_kinds=[answer_pb2.PROOF_KIND_PACKING, answer_pb2.PROOF_KIND_BRANCH],
            recognition=answer_pb2.Recognition(chordal=False, splittance=3),
        )
    )
    answer = user.call(user.service.job("j").answer())
    assert answer.question == nearchord.Fill()
    assert answer.fill_edges.tolist() == [[0, 2], [1, 4]]
    assert answer.fill_edges.dtype == np.uint32
    assert list(answer.columns) == list(columns)
    assert all(np.array_equal(answer.columns[name], values) for name, values in columns.items())
    assert not any(column.flags.writeable for column in answer.columns.values())
    assert not answer.fill_edges.flags.writeable
    assert answer.recognition == nearchord.Recognition(False, None, None, 3)
    assert answer.proof_kinds == (nearchord.ProofKind.PACKING, nearchord.ProofKind.BRANCH)
    assert (answer.structure, answer.chosen.size) == (None, 0)
    with pytest.raises(TypeError):
        answer.columns["more"] = columns["fill_edge"]


def test_half_a_fill_edge_is_a_fault_of_the_server(user, fake):
    """A column of pairs has an even length."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING), DONE]
    question = question_pb2.Question(fill=question_pb2.Fill())
    fake.parts = list(column_parts({"fill_edge": np.zeros(3, np.uint32)}, question=question, verdict=1))
    with pytest.raises(nearchord.ServerFault, match="half a pair"):
        user.call(user.service.job("j").answer())


def test_a_structure_report_is_read(user, fake):
    """Components, the largest core, and one prediction a question."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING), DONE]
    wire = answer_pb2.Prediction(
        question="colourable-subgraph", colours=2, states=10**12, at_least=True, memory_bytes=9, fits=True
    )
    fake.parts = list(
        column_parts(
            {},
            question=question_pb2.Question(structure=question_pb2.Structure()),
            verdict=1,
            structure=answer_pb2.StructureReport(components=3, largest_core=7, predictions=[wire]),
        )
    )
    answer = user.call(user.service.job("j").answer())
    prediction = nearchord.Prediction("colourable-subgraph", 2, 10**12, True, 9, True)
    assert answer.structure == nearchord.StructureReport(3, 7, (prediction,))
    assert answer.fill_edges.shape == (0, 2)
    assert answer.recognition is None


def test_an_answer_that_takes_too_long_raises_and_names_the_job(user, fake):
    """The caller's time passes; the job is not cancelled."""
    fake.events = [transition(2, job_pb2.STAGE_WAITING)]
    fake.gate.clear()
    with pytest.raises(nearchord.TimeoutExceeded, match=r"job j had not ended after 0\.2 seconds; it goes on"):
        user.call(user.service.job("j").answer(timeout=0.2))
    assert "CancelJob" not in fake.calls


def test_answers_of_a_batch_resume_after_the_last_whole_one(user, fake):
    """The stream breaks inside the second answer; it is read again from its head, the first is not."""
    fake.parts = [part for i in range(3) for part in answer_parts(i, range(3 + i))]
    fake.breaks["ReadBatchAnswers"] = [4]
    answers = user.items(user.service.batch("b").answers())
    assert [answer.chosen.tolist() for answer in answers] == [[0, 1, 2], [0, 1, 2, 3], [0, 1, 2, 3, 4]]
    assert [answer.batch_index for answer in answers] == [0, 1, 2]
    assert fake.seen["after_index"] == [-1, 0]


def test_a_graph_is_read_back_by_its_address(user, fake):
    """The very same graph, without what stands beside it."""
    addresses = user.call(user.service.upload(small()))
    assert user.call(user.service.graph(addresses.graph)) == small().with_weights(None).with_names(None)


def test_names_are_read_back_across_a_break(user, fake):
    """Names come in pieces that cut characters in two."""
    names = ("älter", "b", "γ")
    address = user.call(user.service.upload(small().with_names(names))).names
    fake.breaks["ReadContent"] = [1, 2]
    assert user.call(user.service.names(address)) == names
    assert user.call(user.service.names("")) == ()


def test_jobs_are_listed_page_by_page(user, fake):
    """Pages are turned until there are no more, under the same filters."""
    jobs = user.items(user.service.jobs(label="x", stage="WAITING"))
    assert [job.id for job in jobs] == ["job0", "job1", "job2", "job3", "job4"]
    assert {(r.label, r.stage) for r in fake.seen["list"]} == {("x", 1)}
    assert isinstance(jobs[0].question, nearchord.VertexCover)


def test_handles_tell_withdraw_and_delete(user, fake):
    """The plain calls of job and batch reach the server."""
    job, batch = user.service.job("j"), user.service.batch("b")
    assert user.call(job.info()).stage is nearchord.Stage.SOLVING
    assert user.call(job.done()) is False
    fake.events = [DONE]
    assert user.call(job.done()) is True
    assert user.call(job.cancel()).verdict is nearchord.Verdict.CANCELLED
    assert user.call(batch.info()).done == 3
    assert user.call(batch.cancel()).jobs == 3
    user.call(job.delete())
    user.call(batch.delete())
    assert fake.calls["DeleteJob"] == fake.calls["DeleteBatch"] == 1


def test_load_goes_on_after_a_break(user, fake):
    """Live figures come again from a new stream."""
    fake.breaks["WatchLoad"] = [2]
    assert [load.waiting for load in user.items(user.service.load(0.2), limit=4)] == [0, 1, 0, 1]


def test_a_rich_status_becomes_an_error_with_reason_and_violations(user):
    """The class follows the code, the rest the details."""
    with pytest.raises(nearchord.NotFound) as caught:
        user.call(user.service.job("none").info())
    assert caught.value.reason == "JOB_UNKNOWN"
    assert caught.value.violations == (nearchord.Violation("none", "no such job"),)
    with pytest.raises(nearchord.NotReady) as caught:
        user.call(user.service.job("running").delete())
    assert caught.value.reason == "JOB_NOT_DONE"


def test_deleted_content_is_not_believed_to_be_stored(user, fake):
    """Deleting and submitting again stores again."""
    graph = large(20_000)
    for _ in range(2):
        user.call(user.service.delete_content(user.call(user.service.upload(graph)).graph))
        fake.partial.clear()
    assert fake.calls["StoreContent"] == 2


def test_a_closed_session_says_so(user):
    """Calls after close fail in words; closing twice is harmless."""
    user.call(user.service.close())
    user.call(user.service.close())
    with pytest.raises(nearchord.CallFailed, match="the session is closed"):
        user.call(user.service.server())


@pytest.mark.parametrize("shell", [Blocking, Awaiting])
def test_nobody_there_is_unreachable(shell):
    """A port where nothing listens gives an error that names it."""
    user = shell("127.0.0.1:1")
    with pytest.raises(nearchord.Unreachable, match=r"no answer from 127\.0\.0\.1:1 "):
        user.items(user.service.job("j").watch())
    user.close()


@pytest.mark.parametrize("shell", [Blocking, Awaiting])
def test_a_token_travels_with_every_call(shell, fake):
    """The token is call metadata."""
    with served(fake) as target:
        user = shell(target, token="sesame")
        user.call(user.service.server())
        assert fake.metadata["authorization"] == "Bearer sesame"
        user.close()


def test_a_session_is_a_context_manager(fake):
    """The block ends the session, in both shells."""

    async def use(target):
        async with nearchord.connect_async(target) as service:
            return await service.server()

    with served(fake) as target:
        with nearchord.connect(target) as service:
            assert service.server().version == "1"
        assert asyncio.run(use(target)).version == "1"


def test_both_shells_have_one_shape():
    """Every public method of one shell is in the other, with the same parameters."""
    for blocking, awaiting in (
        (nearchord.Service, nearchord.AsyncService),
        (nearchord.Job, nearchord.AsyncJob),
        (nearchord.Batch, nearchord.AsyncBatch),
    ):
        shapes = [
            {
                name: [(p.name, p.kind, p.default) for p in inspect.signature(member).parameters.values()]
                for name, member in vars(shell).items()
                if callable(member) and not name.startswith("_")
            }
            for shell in (blocking, awaiting)
        ]
        assert shapes[0] == shapes[1]
