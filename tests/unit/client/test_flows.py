"""The core without any channel: flows are led by hand, and the clock stands still until it is moved."""

from __future__ import annotations

import nearchord
import pytest
from nearchord.errors import AlreadyExists, NearchordError, NotReady, Unreachable
from nearchord.session import flows_jobs, flows_watch
from nearchord.session.caller import Caller
from nearchord.session.retry import BLIND_TRIES, LARGEST_PAUSE, Retry
from nearchord.session.steps import Emit, Now, Open, Pause, Send, Walk
from nearchord.v1 import job_pb2, job_service_pb2

AWAY = Unreachable("away")


class World:
    """Answers the steps of a flow from a script of replies and errors; pauses move its clock."""

    def __init__(self, *script):
        self.script = list(script)
        self.now = 100.0
        self.pauses = []
        self.steps = []

    def reply(self, step):
        if isinstance(step, Now):
            return self.now
        if isinstance(step, Pause):
            self.pauses.append(step.seconds)
            self.now += step.seconds
            return None
        self.steps.append(step)
        if isinstance(step, Open):
            return "stream"
        reply = self.script.pop(0)
        if isinstance(reply, NearchordError):
            raise reply
        return reply

    def run(self, flow):
        walk, emitted = Walk(flow), []
        while (step := walk.next()) is not None:
            if isinstance(step, Emit):
                emitted.append(step.item)
                continue
            try:
                walk.give(self.reply(step))
            except NearchordError as error:
                walk.fail(error)
        return walk.result if walk.result is not None else emitted


def event(sequence, stage=job_pb2.STAGE_WAITING):
    return job_service_pb2.WatchJobResponse(
        event=job_pb2.Event(sequence=sequence, transition=job_pb2.Transition(stage=stage))
    )


def test_pauses_grow_and_a_sign_of_life_resets_them():
    """Breaks in a row wait longer and longer; after a message the next break waits briefly again."""
    world = World(event(1), AWAY, AWAY, AWAY, event(2), AWAY, None)
    assert [e.sequence for e in world.run(flows_watch.watch_job(Caller(), "j", 0))] == [1, 2]
    assert world.pauses == [0.1, 0.2, 0.4, 0.1]


def test_an_event_seen_before_is_not_given_twice():
    """A server that repeats itself after a break does not show."""
    world = World(event(3), AWAY, event(3), event(4), None)
    assert [e.sequence for e in world.run(flows_watch.watch_job(Caller(), "j", 0))] == [3, 4]


def test_a_server_never_heard_of_is_given_up_soon():
    """A wrong address costs a few tries, not the whole patience."""
    world = World(*[AWAY] * 20)
    with pytest.raises(Unreachable):
        world.run(flows_watch.watch_job(Caller(), "j", 0))
    assert len(world.steps) == 2 * BLIND_TRIES
    assert sum(world.pauses) < 1


def test_a_server_heard_of_is_waited_for_as_long_as_patience_lasts():
    """After a sign of life the flow goes on trying, at most LARGEST_PAUSE apart, until patience is over."""
    world = World(event(1), *[AWAY] * 100)
    with pytest.raises(Unreachable):
        world.run(flows_watch.watch_job(Caller(patience=60), "j", 0))
    assert 50 < sum(world.pauses) <= 60
    assert max(world.pauses) == LARGEST_PAUSE


def test_the_server_says_how_long_to_wait():
    """RetryInfo wins over a shorter pause of our own, and counts as having heard of the server."""
    draining = Unreachable("draining", reason="DRAINING", retry_after=3.0)
    world = World(draining, None)
    world.run(flows_watch.watch_job(Caller(), "j", 0))
    assert world.pauses == [3.0]


@pytest.mark.parametrize(
    ("error", "repeated"),
    [
        (Unreachable("away"), True),
        (NotReady("busy", reason="UPLOAD_BUSY"), True),
        (NotReady("offset", reason="UPLOAD_OFFSET"), True),
        (NotReady("running", reason="JOB_NOT_DONE"), False),
        (AlreadyExists("other content"), False),
    ],
    ids=lambda value: getattr(value, "reason", "") or str(value),
)
def test_only_what_may_pass_by_itself_is_repeated(error, repeated):
    """Refusals are handed to the caller at once."""
    retry = Retry(60, 0.0, heard=True)
    if repeated:
        assert retry.pause_after(error, 0.0) > 0
    else:
        with pytest.raises(type(error)):
            retry.pause_after(error, 0.0)


def test_a_deadline_shrinks_with_every_try_and_ends_pauses():
    """Streams are opened with the seconds that are left, and a pause never outlasts them."""
    world = World(event(1), AWAY, AWAY, AWAY, AWAY, AWAY)
    with pytest.raises(nearchord.TimeoutExceeded, match="job j had not ended after 1"):
        world.run(flows_watch.answer(Caller(), "j", 1.0))
    opened = [step.seconds for step in world.steps if isinstance(step, Open)]
    assert opened[:3] == pytest.approx([1.0, 0.9, 0.7])
    assert sum(world.pauses) == pytest.approx(1.0)


def test_a_refused_batch_is_not_repeated():
    """The same request id with other content stays an error."""
    world = World(AlreadyExists("used before", reason="REQUEST_ID_REUSED"))
    item = nearchord.JobRequest(nearchord.Graph.from_edges(1, []), nearchord.IndependentSet())
    with pytest.raises(AlreadyExists):
        world.run(flows_jobs.submit_batch(Caller(), [item], "", "r"))
    assert [type(step) for step in world.steps] == [Send]


def test_a_batch_holds_a_bounded_number_of_inline_bytes(monkeypatch):
    """Once a batch carries enough bytes, further graphs are stored and named by address."""
    monkeypatch.setattr(flows_jobs, "BATCH_INLINE_BYTES", 220)
    graphs = [nearchord.Graph.from_edges(9, [(0, i)]) for i in range(1, 6)]
    caller = Caller(stored={graph.address for graph in graphs})
    items = [nearchord.JobRequest(graph, nearchord.IndependentSet()) for graph in graphs]
    specs = World().run(flows_jobs.batch_specs(caller, items))
    kinds = [spec.input.WhichOneof("graph") for spec in specs]
    assert kinds == ["graph_content", "graph_content", "graph_address", "graph_address", "graph_address"]


def test_a_negative_cursor_is_refused():
    """Numbers of events begin at 0."""
    with pytest.raises(nearchord.BadInput, match="after is -1"):
        World().run(flows_watch.watch_job(Caller(), "j", -1))


@pytest.mark.parametrize("interval", [0.1, 61, float("nan")])
def test_a_wrong_interval_is_refused(interval):
    """Live figures come every 0.2 to 60 seconds."""
    with pytest.raises(nearchord.BadInput, match="interval is"):
        World().run(flows_watch.load(Caller(), interval))
