"""From what a caller says to the messages of the wire."""

from __future__ import annotations

import uuid
from collections.abc import Iterable
from datetime import UTC, datetime

from google.protobuf.timestamp_pb2 import Timestamp

from nearchord.budget import Budget
from nearchord.errors import BadInput
from nearchord.graph import Graph
from nearchord.jobs import Addresses, JobRequest
from nearchord.question import QUESTIONS, Choice, Pin, Question
from nearchord.session.content import InputContent
from nearchord.stages import Stage, WhenOver
from nearchord.v1 import content_pb2, job_pb2, question_pb2

WHEN_OVER = {WhenOver.BOUND: question_pb2.WHEN_OVER_BOUND, WhenOver.STOP: question_pb2.WHEN_OVER_STOP}
STAGES = {
    Stage.WAITING: job_pb2.STAGE_WAITING,
    Stage.SOLVING: job_pb2.STAGE_SOLVING,
    Stage.DONE: job_pb2.STAGE_DONE,
}


def new_request_id() -> str:
    """A request id that nobody has used: repeating a call under it is harmless."""
    return uuid.uuid4().hex


def spec(request: JobRequest, graph_input: content_pb2.GraphInput) -> job_pb2.JobSpec:
    """The spec of a job whose graph travels as `graph_input`."""
    try:
        return job_pb2.JobSpec(
            input=graph_input,
            question=question(request.question, request.graph),
            budget=budget(request.budget or Budget()),
            when_over=when_over(request.when_over),
            priority=request.priority,
            not_after=None if request.not_after is None else timestamp(request.not_after),
            label=request.label,
        )
    except (TypeError, ValueError) as wrong:
        if isinstance(wrong, BadInput):
            raise
        raise BadInput(f"a field of the job cannot be sent ({wrong})", "correct priority or label") from wrong


def question(asked: Question, graph: Graph | Addresses) -> question_pb2.Question:
    """A question, its pins as numbers; BadInput as by `check_asked`."""
    check_asked(asked, graph)
    message = question_pb2.Question()
    wire = getattr(message, asked.name.replace("-", "_"))
    wire.SetInParent()
    if isinstance(asked, Choice):
        wire.must.extend(pins("must", asked.must, graph))
        wire.never.extend(pins("never", asked.never, graph))
    for name in asked.add_ons():
        value = asked.scenario_count if name == "scenarios" else getattr(asked, name)
        if value is not None:
            setattr(wire, name, value)
    return message


def check_asked(asked: Question, graph: Graph | Addresses) -> None:
    """BadInput for what is no question, or has scenarios or demands that do not fit the graph."""
    if not isinstance(asked, Question) or asked.name not in QUESTIONS:
        raise BadInput(f"{asked!r} is no question", f"ask one of {', '.join(k.__name__ for k in QUESTIONS.values())}")
    if not isinstance(graph, Graph):
        return
    vectors = asked.vectors
    if vectors is not None and vectors.shape[-1] != graph.n:
        what = "demands" if vectors.ndim == 1 else "weights in each scenario"
        raise BadInput(f"there are {vectors.shape[-1]} {what} for {graph.n} vertices", "give one a vertex")
    if vectors is None and asked.scenario_count:
        raise BadInput(f"scenarios is the number {asked.scenario_count}", "give the weight vectors, one a row")


def pins(field: str, given: tuple[Pin, ...], graph: Graph | Addresses) -> list[int]:
    """Pins as vertex numbers; BadInput names the first that is not a vertex of the graph."""
    return [pin_number(field, pin, graph) for pin in given]


def pin_number(field: str, pin: Pin, graph: Graph | Addresses) -> int:
    """One pin as a vertex number."""
    if isinstance(pin, str):
        return _named(field, pin, graph)
    limit = graph.n if isinstance(graph, Graph) else 2**32
    if not 0 <= pin < limit:
        what = f"the graph has vertices 0 to {limit - 1}" if limit else "the graph has no vertices"
        raise BadInput(f"{field} has vertex {pin}, which does not exist", what)
    return pin


def _named(field: str, name: str, graph: Graph | Addresses) -> int:
    if not isinstance(graph, Graph) or graph.names is None:
        raise BadInput(f"{field} has the name {name!r}, but the graph carries no names", "give vertex numbers from 0")
    try:
        return graph.vertex(name)
    except KeyError:
        raise BadInput(f"{field} has {name!r}, which is no vertex of the graph", "give names of the graph") from None


def budget(spent: Budget) -> question_pb2.Budget:
    """A budget; absent fields stay absent."""
    return question_pb2.Budget(fill=spent.fill, states=spent.states, seconds=spent.seconds, memory_bytes=spent.memory)


def when_over(word: WhenOver | str) -> question_pb2.WhenOver:
    """`bound` or `stop`."""
    try:
        return WHEN_OVER[WhenOver(word)]
    except ValueError:
        raise BadInput(f"when_over is {word!r}", "say 'bound' or 'stop'") from None


def stage(word: Stage | str | None) -> job_pb2.Stage:
    """A stage to filter by; None: every stage."""
    if word is None:
        return job_pb2.STAGE_UNSPECIFIED
    try:
        return STAGES[Stage(word)]
    except ValueError:
        raise BadInput(f"stage is {word!r}", "say WAITING, SOLVING or DONE") from None


def timestamp(moment: datetime) -> Timestamp:
    """A moment; BadInput without a time zone, because nobody could tell when it is."""
    if moment.tzinfo is None:
        raise BadInput(f"not_after {moment.isoformat()} has no time zone", "add one, such as datetime.UTC")
    result = Timestamp()
    result.FromDatetime(moment.astimezone(UTC))
    return result


def inline_input(content: InputContent, known: Addresses) -> content_pb2.GraphInput:
    """Content that travels with its job; what it lacks is named by the addresses that are known."""
    message = stored_input(known)
    for kind in ("graph", "weights", "names"):
        part = getattr(content, kind)
        if part is not None:
            setattr(message, f"{kind}_content", part.inline())
    return message


def stored_input(addresses: Addresses, known: Addresses | None = None) -> content_pb2.GraphInput:
    """Content that has been stored; where an address is empty, the one that is known."""
    found = {kind: getattr(addresses, kind) or getattr(known, kind, "") for kind in ("graph", "weights", "names")}
    return content_pb2.GraphInput(**{f"{kind}_address": address or None for kind, address in found.items()})


def checked_id(kind: str, word: str) -> str:
    """An id; BadInput when it is empty or no text."""
    if not isinstance(word, str) or not word:
        raise BadInput(f"{word!r} is no {kind} id", f"give the id printed when the {kind} was submitted")
    return word


def request_list(items: Iterable[JobRequest]) -> list[JobRequest]:
    """The jobs of a batch; BadInput when there is none, or when something else is among them."""
    requests = list(items)
    if not requests:
        raise BadInput("a batch has no jobs", "give at least one JobRequest")
    for place, item in enumerate(requests):
        if not isinstance(item, JobRequest):
            raise BadInput(f"item {place} of the batch is {type(item).__name__}", "give nearchord.JobRequest objects")
    return requests
