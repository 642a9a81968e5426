"""Questions and budgets, in and out."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from nearchord.v1 import question_pb2

from nearchord_service.api.convert.add_ons import check_add_ons, from_add_ons, to_add_ons
from nearchord_service.api.convert.enums import QUESTION_FIELDS, QUESTIONS_BY_FIELD, WHEN_OVERS_BY_NUMBER
from nearchord_service.api.convert.violations import Violations
from nearchord_service.api.limits import Caps, Largest
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver


def to_question(message: question_pb2.Question, place: str, caps: Caps, wrong: Violations) -> Question | None:
    """Read a question without looking at the graph; notes what is wrong and returns None then."""
    name = message.WhichOneof("question")
    if name is None:
        wrong.add(place, f"is missing or not known to this server; ask one of {', '.join(QuestionName)}")
        return None
    asked, question = getattr(message, name), QUESTIONS_BY_FIELD[name]
    if not question.chooses:
        return Question(question)
    pins = len(asked.must) + len(asked.never)
    if pins > caps.pins:
        wrong.add(
            f"{place}.{name}", f"pins {pins} vertices, where {caps.pins} are allowed; leave them out of the graph"
        )
        return None
    must = _pins(asked.must, f"{place}.{name}.must", wrong)
    never = _pins(asked.never, f"{place}.{name}.never", wrong)
    return Question(question, must, never, **to_add_ons(asked, question, f"{place}.{name}", wrong))


def _pins(vertices: Sequence[int], place: str, wrong: Violations) -> tuple[int, ...]:
    if not vertices:
        return ()
    if len(set(vertices)) < len(vertices):
        seen: dict[int, int] = {}
        for at, vertex in enumerate(vertices):
            if vertex in seen:
                wrong.add(f"{place}[{at}]", f"names vertex {vertex} again, after [{seen[vertex]}]; name it once")
                return ()
            seen[vertex] = at
    return tuple(sorted(vertices))


def depends_on_vertices(question: Question) -> bool:
    """Say whether the number of vertices decides if a question may be asked."""
    return bool(question.must or question.never) or question.best > 1 or question.scenarios > 1


def check_vertices(
    message: question_pb2.Question, question: Question, vertices: int, place: str, wrong: Violations
) -> None:
    """Note the first pin of each list that is no vertex of the graph, and add-ons that are too much for so many."""
    name = QUESTION_FIELDS[question.name]
    asked = getattr(message, name)
    check_add_ons(question, vertices, f"{place}.{name}", wrong)
    for option, pins in (("must", question.must), ("never", question.never)):
        if not pins or pins[-1] < vertices:
            continue
        at, vertex = next((at, v) for at, v in enumerate(getattr(asked, option)) if v >= vertices)
        wrong.add(f"{place}.{name}.{option}[{at}]", f"names vertex {vertex}, but {_vertices_of(vertices)}")


def _vertices_of(vertices: int) -> str:
    if not vertices:
        return "the graph has no vertices; leave the pin out"
    return f"the graph has {vertices}, numbered from 0 to {vertices - 1}"


def from_question(question: Question) -> question_pb2.Question:
    """Write a question."""
    message = question_pb2.Question()
    asked = getattr(message, QUESTION_FIELDS[question.name])
    asked.SetInParent()
    if question.name.chooses:
        asked.must.extend(question.must)
        asked.never.extend(question.never)
    from_add_ons(question, asked)
    return message


def to_when_over(number: question_pb2.WhenOver, place: str, wrong: Violations) -> WhenOver:
    """Read what to do when a budget does not suffice."""
    if number == question_pb2.WHEN_OVER_UNSPECIFIED:
        return WhenOver.BOUND
    member = WHEN_OVERS_BY_NUMBER.get(number)
    if member is None:
        wrong.add(place, f"is {number}, which this server does not know; say BOUND or STOP")
        return WhenOver.BOUND
    return member


# Field, what it must at least be, and whether that value itself will do.
_FLOORS = (("fill", 0, True), ("states", 1, True), ("seconds", 0, False), ("memory_bytes", 1, True))


def to_budget(message: question_pb2.Budget, place: str, caps: Caps, wrong: Violations) -> Budget:
    """Read a budget, defaults filled in; notes what is wrong."""
    values: dict[str, Any] = {}
    for name, floor, inclusive in _FLOORS:
        if not message.HasField(name):
            values[name] = getattr(caps.default_budget, name)
            continue
        value = values[name] = getattr(message, name)
        cap = getattr(caps.largest_budget, name)
        if math.isnan(value):
            wrong.add(f"{place}.{name}", "is not a number")
        elif value < floor or (value == floor and not inclusive):
            least = f"at least {floor}" if inclusive else f"above {floor}"
            wrong.add(f"{place}.{name}", f"is {value}; it must be {least}, or absent for the default")
        elif cap is not None and value > cap:
            wrong.add(f"{place}.{name}", f"is {value}, but this server allows at most {cap}")
        elif math.isinf(value):
            wrong.add(f"{place}.{name}", "is infinite; name a finite number")
    return Budget(**values)


def from_budget(budget: Budget | Largest) -> question_pb2.Budget:
    """Write a budget; None stays absent."""
    return question_pb2.Budget(
        fill=budget.fill, states=budget.states, seconds=budget.seconds, memory_bytes=budget.memory_bytes
    )
