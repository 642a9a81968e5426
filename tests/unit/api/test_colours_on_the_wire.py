"""Colours of a question: there and back, and refused where they are wrong."""

from __future__ import annotations

import nearchord
import pytest
from nearchord.session import replies, requests
from nearchord.v1 import question_pb2
from nearchord_service.api.convert.questions import from_question, to_question
from nearchord_service.api.convert.violations import Violations
from nearchord_service.model.errors import FieldInvalid
from nearchord_service.model.question import QuestionName
from unit.api.test_specs import CAPS

GRAPH = nearchord.Graph.from_edges(3, [(0, 1)])


@pytest.mark.parametrize("colours", [1, 2, 3, 4])
def test_colours_travel_through_client_and_service(colours: int) -> None:
    asked = nearchord.ColourableSubgraph(must=[1], never=[2], colours=colours)
    wrong = Violations()
    model = to_question(requests.question(asked, GRAPH), "question", CAPS, wrong)
    assert model is not None
    assert (model.name, model.colours) == (QuestionName.COLOURABLE_SUBGRAPH, colours)
    assert replies.question(from_question(model)) == asked


def test_absent_colours_are_two() -> None:
    message = question_pb2.Question(colourable_subgraph=question_pb2.ColourableSubgraph())
    model = to_question(message, "question", CAPS, Violations())
    assert model is not None
    assert model.colours == 2


@pytest.mark.parametrize("colours", [0, 5, "two", 1.5])
def test_the_client_refuses_colours_out_of_range(colours: object) -> None:
    with pytest.raises(nearchord.BadInput, match="colours"):
        nearchord.ColourableSubgraph(colours=colours)  # type: ignore[arg-type]


def test_the_service_refuses_more_than_four_colours() -> None:
    message = question_pb2.Question(colourable_subgraph=question_pb2.ColourableSubgraph(colours=5))
    wrong = Violations()
    to_question(message, "spec.question", CAPS, wrong)
    with pytest.raises(FieldInvalid) as caught:
        wrong.settle()
    (found,) = caught.value.violations
    assert found.field == "spec.question.colourable_subgraph.colours"
    assert "must be 1 to 4" in found.description
