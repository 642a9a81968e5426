"""Scenarios and demands go where the weights of the graph would: inline, stored, or beside a stored graph."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import nearchord
import numpy as np
import pytest
from nearchord.question import Question
from unit.client.fake_service import FakeService, served

GRAPH = nearchord.Graph.from_edges(3, [(0, 1)], weights=[9, 9, 9], names=["a", "b", "c"])
STORED = nearchord.Addresses("0" * 64, "1" * 64, "2" * 64)
SCENARIOS = nearchord.InducedForest(scenarios=[[1, 2, 3], [4, 5, 6]])
DEMANDS = nearchord.FractionalColouring(demands=[0, 1, 2])


@pytest.fixture
def fake() -> FakeService:
    service = FakeService()
    service.contents = dict.fromkeys((STORED.graph, STORED.weights, STORED.names), b"")
    return service


@pytest.fixture
def service(fake: FakeService) -> Iterator[nearchord.Service]:
    with served(fake) as target, nearchord.connect(target) as session:
        yield session


def sent(numbers: Any) -> bytes:
    return np.array(numbers, "<i8").tobytes()


@pytest.mark.parametrize(("asked", "numbers"), [(SCENARIOS, range(1, 7)), (DEMANDS, range(3))], ids=str)
def test_vectors_are_sent_instead_of_weights(
    service: nearchord.Service, fake: FakeService, asked: Question, numbers: Any
) -> None:
    """Alone and in a batch, with the graph itself and with its address."""
    for graph in (GRAPH, STORED):
        service.submit(graph, asked)
        service.submit_batch([nearchord.JobRequest(graph, asked)])
    specs = [*fake.seen["spec"], *(specs[0] for _, specs in fake.seen["batch"])]
    assert [spec.input.weights_content for spec in specs] == [sent(list(numbers))] * 4
    assert [spec.input.graph_address for spec in specs] == ["", STORED.graph] * 2
    assert [spec.input.names_address for spec in specs] == ["", STORED.names] * 2
    assert specs[0].input.names_content == b"a\nb\nc\n"
    assert fake.calls["StoreContent"] == 0


@pytest.mark.parametrize("asked", [nearchord.Colouring(), nearchord.FractionalColouring()])
def test_weights_of_the_graph_are_no_demands(service: nearchord.Service, fake: FakeService, asked: Question) -> None:
    service.submit(GRAPH, asked)
    service.submit(STORED, asked)
    assert [spec.input.WhichOneof("weights") for spec in fake.seen["spec"]] == [None, None]


def test_large_vectors_are_stored_once(service: nearchord.Service, fake: FakeService) -> None:
    """Beside the graph, or alone where it has an address; when they are gone they are stored again."""
    fake.inline_bytes = 10_000
    n = 20_000
    graph = nearchord.Graph.from_edges(n, [(0, 1)])
    asked = nearchord.Colouring(demands=range(n))
    for subject in (graph, STORED, STORED):
        service.submit(subject, asked)
    where = [spec.input.weights_address for spec in fake.seen["spec"]]
    assert len(set(where)) == 1
    assert fake.contents[where[0]] == sent(range(n))
    assert fake.calls["StoreContent"] == 2  # the graph and the demands
    del fake.contents[where[0]], fake.partial[where[0]]
    service.submit(STORED, asked)
    assert fake.contents[where[0]] == sent(range(n))


def test_a_number_of_scenarios_takes_the_stored_weights(service: nearchord.Service, fake: FakeService) -> None:
    """They hold so many vectors already; a graph at hand has to bring them."""
    service.submit(STORED, nearchord.IndependentSet(scenarios=7))
    (spec,) = fake.seen["spec"]
    assert (spec.input.weights_address, spec.question.independent_set.scenarios) == (STORED.weights, 7)
    with pytest.raises(nearchord.BadInput, match="scenarios is the number 7; give the weight vectors"):
        service.submit(GRAPH, nearchord.IndependentSet(scenarios=7))


@pytest.mark.parametrize(
    ("asked", "message"),
    [
        (nearchord.IndependentSet(scenarios=[[1, 2]]), "there are 2 weights in each scenario for 3 vertices"),
        (nearchord.Colouring(demands=[1, 2, 3, 4]), "there are 4 demands for 3 vertices"),
    ],
)
def test_vectors_that_do_not_fit_the_graph_are_refused(
    service: nearchord.Service, asked: Question, message: str
) -> None:
    with pytest.raises(nearchord.BadInput, match=message):
        service.submit(GRAPH, asked)
