"""Requests, replies, assembly, status and channel: the parts of the core that turn one thing into another."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta, timezone
from fractions import Fraction

import grpc
import nearchord
import pytest
from google.protobuf.duration_pb2 import Duration
from google.rpc import error_details_pb2
from nearchord.session import channel, content, replies, requests, status
from nearchord.session.assembly import AnswerAssembly
from nearchord.v1 import answer_pb2, content_pb2, job_pb2, question_pb2
from unit.client.fake_service import answer_parts, rich_status

GRAPH = nearchord.Graph.from_edges(3, [(0, 1)], names=["a", "b", "c"])


class Failed:
    """A failed call."""

    def __init__(self, code, details="", metadata=()):
        self._code, self._details, self._metadata = code, details, metadata

    def code(self):
        return self._code

    def details(self):
        return self._details

    def trailing_metadata(self):
        return self._metadata


def failed(code, reason, message, *details):
    rich = rich_status(code, reason, message, *details)
    return Failed(rich.code, rich.details, rich.trailing_metadata)


def test_every_status_code_has_an_error():
    """Whatever the code, the caller gets a NearchordError with a reason and a text."""
    for code in grpc.StatusCode:
        error = status.decode(Failed(code), "host:1")
        assert isinstance(error, nearchord.NearchordError), code
        assert error.reason
        assert str(error)


def test_field_violations_are_kept():
    """BadRequest names each field and remedy."""
    bad = error_details_pb2.BadRequest()
    bad.field_violations.add(field="spec.priority", description="is 2000; give -1000 to 1000")
    error = status.decode(failed(grpc.StatusCode.INVALID_ARGUMENT, "FIELD_INVALID", "wrong", bad), "host:1")
    assert isinstance(error, nearchord.Rejected)
    assert error.violations == (nearchord.Violation("spec.priority", "is 2000; give -1000 to 1000"),)


def test_retry_delay_is_kept():
    """RetryInfo becomes seconds."""
    retry = error_details_pb2.RetryInfo(retry_delay=Duration(seconds=2, nanos=500_000_000))
    error = status.decode(failed(grpc.StatusCode.UNAVAILABLE, "DRAINING", "shutting down", retry), "host:1")
    assert isinstance(error, nearchord.Unreachable)
    assert (error.reason, error.retry_after, str(error)) == ("DRAINING", 2.5, "shutting down")


def test_broken_details_do_not_hide_the_error():
    """Details that are no status are left out."""
    error = status.decode(Failed(grpc.StatusCode.INTERNAL, "oops", ((status.DETAILS_KEY, b"\xff\xff"),)), "host:1")
    assert isinstance(error, nearchord.ServerFault)
    assert str(error) == "oops"


@pytest.mark.parametrize(
    ("pin", "message"),
    [
        (3, "must has vertex 3, which does not exist; the graph has vertices 0 to 2"),
        (-1, "must has vertex -1, which does not exist; the graph has vertices 0 to 2"),
        ("d", "must has 'd', which is no vertex of the graph; give names of the graph"),
    ],
)
def test_pins_that_are_no_vertices_are_refused(pin, message):
    """The message names field, pin and remedy."""
    with pytest.raises(nearchord.BadInput) as caught:
        requests.question(nearchord.IndependentSet(must=[pin]), GRAPH)
    assert str(caught.value) == message


def test_names_need_a_graph_that_has_them():
    """Pins by name do not work where nobody knows the names."""
    for graph in (nearchord.Graph.from_edges(1, []), nearchord.Addresses("00")):
        with pytest.raises(nearchord.BadInput, match="carries no names"):
            requests.question(nearchord.IndependentSet(must=["a"]), graph)


def test_pins_are_vertices_and_nothing_else():
    """A word alone and a fraction are refused where the question is built."""
    with pytest.raises(nearchord.BadInput, match=r"write must=\['ab'\]"):
        nearchord.IndependentSet(must="ab")
    with pytest.raises(nearchord.BadInput, match=r"never has 1\.5"):
        nearchord.VertexCover(never=[1.5])


@pytest.mark.parametrize(
    ("fields", "message"),
    [({"fill": 1.5}, "fill=1.5"), ({"states": 2**63}, "out of range"), ({"seconds": "1"}, "seconds='1'")],
)
def test_budgets_are_numbers(fields, message):
    """What cannot be sent at all is refused here; ranges are the server's to check."""
    with pytest.raises(nearchord.BadInput, match=message):
        nearchord.Budget(**fields)


def test_budget_survives_the_wire():
    """Absent fields stay absent, 0 stays 0."""
    for budget in (nearchord.Budget(), nearchord.Budget(0, 1, 0.5, 2)):
        assert replies.budget(requests.budget(budget)) == budget


@pytest.mark.parametrize("question", [nearchord.IndependentSet([0, "c"], [1]), nearchord.VertexCover()])
def test_choice_survives_the_wire(question):
    """Names become numbers, everything else stays."""
    back = replies.question(requests.question(question, GRAPH))
    assert type(back) is type(question)
    assert back.must == tuple(GRAPH.vertex(pin) if isinstance(pin, str) else pin for pin in question.must)
    assert back.never == question.never


@pytest.mark.parametrize("question", [nearchord.Fill(), nearchord.Structure()])
def test_question_about_the_graph_alone_survives_the_wire(question):
    """There is nothing in it but its name."""
    written = requests.question(question, GRAPH)
    assert written.WhichOneof("question") == question.name
    assert replies.question(written) == question


def test_questions_about_the_graph_alone_take_no_pins():
    """Neither by position nor by name."""
    for kind in (nearchord.Fill, nearchord.Structure):
        with pytest.raises(TypeError):
            kind(must=[1])
        with pytest.raises(TypeError):
            kind([1])


@pytest.mark.parametrize("asked", ["fill", None, nearchord.Fill, nearchord.Question()])
def test_what_is_no_question_is_refused(asked):
    """The remedy lists what can be asked."""
    with pytest.raises(nearchord.BadInput, match="ask one of IndependentSet, VertexCover, Clique, ColourableSubgraph"):
        requests.question(asked, GRAPH)


def test_an_unknown_question_of_the_server_is_a_fault_not_a_crash():
    """A newer server's question says: update the client."""
    with pytest.raises(nearchord.ServerFault, match="update the client"):
        replies.question(question_pb2.Question())


def test_not_after_needs_a_time_zone():
    """A naive moment is refused, an aware one becomes UTC."""
    with pytest.raises(nearchord.BadInput, match="has no time zone"):
        requests.timestamp(datetime(2030, 1, 1))
    moment = datetime(2030, 1, 1, 12, tzinfo=timezone(timedelta(hours=2)))
    assert requests.timestamp(moment).ToDatetime(tzinfo=UTC) == moment


@pytest.mark.parametrize("field", [{"priority": "high"}, {"priority": 2**40}, {"label": 7}])
def test_fields_that_cannot_be_sent_are_bad_input(field):
    """No protobuf error reaches the caller."""
    request = nearchord.JobRequest(GRAPH, nearchord.IndependentSet(), **field)
    with pytest.raises(nearchord.BadInput, match="a field of the job cannot be sent"):
        requests.spec(request, content_pb2.GraphInput())


def test_words_outside_their_sets_are_bad_input():
    """when_over and stage know their words."""
    with pytest.raises(nearchord.BadInput, match="say 'bound' or 'stop'"):
        requests.when_over("perhaps")
    with pytest.raises(nearchord.BadInput, match="say WAITING, SOLVING or DONE"):
        requests.stage("LATER")


def test_every_word_of_the_contract_is_known():
    """Stages, verdicts and phases of the contract all have a counterpart."""
    assert {replies.stage(word) for word in job_pb2.Stage.values() if word} == set(nearchord.Stage)
    assert {replies.verdict(word) for word in job_pb2.Verdict.values() if word} == set(nearchord.Verdict)
    assert {replies.phase(word) for word in job_pb2.Phase.values() if word} == set(nearchord.Phase)
    assert {replies.PROOF_KINDS[word] for word in answer_pb2.ProofKind.values()} == set(nearchord.ProofKind)
    fields = question_pb2.Question.DESCRIPTOR.fields_by_name
    assert {name.replace("_", "-") for name in fields} == set(nearchord.QUESTIONS)


def test_content_is_cut_into_pieces_from_any_offset():
    """Pieces joined are the rest of the bytes, wherever one begins."""
    stored = content.content_of(GRAPH).graph
    whole = stored.inline()
    for offset in range(len(whole) + 1):
        pieces = list(stored.pieces(offset, 5))
        assert b"".join(pieces) == whole[offset:]
        assert all(0 < len(piece) <= 5 for piece in pieces)


def test_names_are_terminated_lines():
    """Every name is ended by a line feed, as the contract says."""
    assert content.names_bytes(("a", "ß")) == "a\nß\n".encode()
    assert content.names_from(b"") == ()
    with pytest.raises(nearchord.BadInput, match="UTF-8 cannot hold"):
        content.names_bytes(("\ud800",))


def test_values_are_exact():
    """Whole values are ints, others fractions."""
    assert replies.rational(answer_pb2.Rational(numerator=6, denominator=2)) == 3
    assert isinstance(replies.rational(answer_pb2.Rational(numerator=6, denominator=2)), int)
    assert replies.rational(answer_pb2.Rational(numerator=5, denominator=2)) == Fraction(5, 2)


@pytest.mark.parametrize("lost", [1, 2], ids=["a piece in the middle", "the last piece"])
def test_an_answer_with_a_lost_piece_is_refused(lost):
    """Half a column is never taken for a whole one."""
    parts = list(answer_parts(0, [1, 2, 3], piece=1 if lost == 1 else 2))
    del parts[lost]
    assembly = AnswerAssembly()

    def read():
        for part in parts:
            assembly.take(part)
        assembly.finish()

    with pytest.raises(nearchord.ServerFault, match="chosen"):
        read()


def test_pieces_of_an_answer_in_the_wrong_order_are_refused():
    """Every piece begins where the one before it ended."""
    head, first, second = answer_parts(0, [1, 2], piece=1)
    assembly = AnswerAssembly()
    assembly.take(head)
    with pytest.raises(nearchord.ServerFault, match="is missing before element 1"):
        assembly.take(second)
    assert assembly.take(first) is None


def test_an_unannounced_column_is_refused():
    """A piece needs a head that names its column."""
    with pytest.raises(nearchord.ServerFault, match="without having been announced"):
        AnswerAssembly().take(list(answer_parts(0, [1]))[1])


@pytest.mark.parametrize(
    ("target", "loopback"),
    [
        ("127.0.0.1:7411", True),
        ("localhost:7411", True),
        ("dns:///localhost:1", True),
        ("[::1]:7411", True),
        ("ipv6:[::1]:1", True),
        ("unix:/tmp/x", True),
        ("10.0.0.1:7411", False),
        ("127.0.0.1.example:1", False),
        ("localhost.example:1", False),
        ("server:7411", False),
        ("[::2]:1", False),
    ],
)
def test_loopback_is_told_from_the_network(target, loopback):
    """A token in the clear never leaves the machine."""
    assert channel.is_loopback(target) is loopback
    if loopback:
        assert channel.call_metadata(target, "t", None) == (("authorization", "Bearer t"),)
    else:
        with pytest.raises(nearchord.BadInput, match="in the clear"):
            channel.call_metadata(target, "t", None)
        assert channel.call_metadata(target, "t", True)


@pytest.mark.parametrize("token", ["", "a b", "a\n", "ä"])
def test_tokens_that_no_header_can_hold_are_refused(token):
    """The message does not repeat the token."""
    with pytest.raises(nearchord.BadInput, match="the token has") as caught:
        channel.call_metadata("localhost:1", token, None)
    assert repr(token) not in str(caught.value)


@pytest.mark.parametrize("target", ["", "http://x", "https://x:1", 7411])
def test_targets_are_host_and_port(target):
    """A URL or nothing is refused with the remedy."""
    with pytest.raises(nearchord.BadInput, match=r"such as 127\.0\.0\.1:7411"):
        nearchord.connect(target)


def test_unreadable_certificates_are_bad_input(tmp_path):
    """The path is named."""
    with pytest.raises(nearchord.BadInput, match=r"none\.pem cannot be read"):
        nearchord.connect("host:1", tls=tmp_path / "none.pem")


def test_channel_options_carry_the_retry_policy():
    """The service config beside the stubs is used, with retries on."""
    options = dict(channel.options())
    assert '"retryPolicy"' in options["grpc.service_config"]
    assert options["grpc.enable_retries"] == 1
    assert options["grpc.keepalive_time_ms"] == 60_000
