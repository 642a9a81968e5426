"""Add-ons of a question: from the client to the service's model, and back to the client."""

from __future__ import annotations

import nearchord
import pytest
from nearchord.question import Question
from nearchord.session import replies, requests
from nearchord_service.api.convert.questions import from_question, to_question
from nearchord_service.api.convert.violations import Violations
from unit.api.test_specs import CAPS

GRAPH = nearchord.Graph.from_edges(3, [(0, 1)])
ROWS = [[1, 2, 3], [4, 5, 6]]


@pytest.mark.parametrize(
    "asked",
    [
        nearchord.IndependentSet(),
        nearchord.IndependentSet(must=[1], never=[2], prices=True, conflict_prices=True, best=7, count=True),
        nearchord.IndependentSet(best=1_000),
        nearchord.IndependentSet(limit=0),
        nearchord.IndependentSet(must=[2], limit=2**32 - 1),
        nearchord.IndependentSet(never=[0], scenarios=ROWS),
        nearchord.ColourableSubgraph(must=[0], colours=3, prices=True),
        nearchord.ColourableSubgraph(colours=1, scenarios=ROWS),
        nearchord.InducedForest(prices=True),
        nearchord.InducedForest(must=[0], scenarios=ROWS),
        nearchord.Colouring(demands=[1, 2, 3]),
        nearchord.FractionalColouring(),
    ],
    ids=str,
)
def test_what_is_asked_comes_back_without_its_vectors(asked: Question) -> None:
    wrong = Violations()
    model = to_question(requests.question(asked, GRAPH), "question", CAPS, wrong)
    wrong.settle()
    assert model is not None
    back = replies.question(from_question(model))
    assert back == asked
    assert back.vectors is None
    assert back.scenario_count == asked.scenario_count
