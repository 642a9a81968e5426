"""Questions and budgets as the service keeps them: validated, plain, comparable, and easy to write down."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class QuestionName(StrEnum):
    """The closed set of questions, by their names on the command line and in metrics."""

    INDEPENDENT_SET = "independent-set"
    VERTEX_COVER = "vertex-cover"
    CLIQUE = "clique"
    COLOURABLE_SUBGRAPH = "colourable-subgraph"
    INDUCED_FOREST = "induced-forest"
    COLOURING = "colouring"
    FRACTIONAL_COLOURING = "fractional-colouring"
    FILL = "fill"
    STRUCTURE = "structure"

    @property
    def chooses(self) -> bool:
        """Whether its answer is a set of vertices: only then does it take pins, and weights as what each is worth."""
        return not self.takes_demands and self not in (QuestionName.FILL, QuestionName.STRUCTURE)

    @property
    def takes_demands(self) -> bool:
        """Whether the weights of its job are demands: how much each vertex needs."""
        return self in (QuestionName.COLOURING, QuestionName.FRACTIONAL_COLOURING)

    @property
    def takes_weights(self) -> bool:
        """Whether its job may carry weights, be they worths or demands."""
        return self.chooses or self.takes_demands

    @property
    def add_ons(self) -> tuple[str, ...]:
        """Those fields of `Question` beside the pins that it takes, in the order of the contract."""
        return _ADD_ONS.get(self, ())


_ADD_ONS = {
    QuestionName.INDEPENDENT_SET: ("prices", "conflict_prices", "best", "count", "limit", "scenarios"),
    QuestionName.COLOURABLE_SUBGRAPH: ("colours", "prices", "scenarios"),
    QuestionName.INDUCED_FOREST: ("prices", "scenarios"),
}


class WhenOver(StrEnum):
    """What to do when the fill budget or the state budget does not suffice."""

    BOUND = "bound"
    STOP = "stop"


@dataclass(frozen=True)
class Question:
    """What a job asks. `must` and `never` are vertex numbers from 0, ascending, without repetition; both are empty
    for a question that does not choose vertices.

    The other fields keep their default for a question that does not take them. `colours`: how many. `prices`,
    `conflict_prices`: of every vertex, of every edge. `best`: how many of the best sets; 0 and 1 give the choice alone.
    `count`: the number of optima. `limit`: most vertices chosen, None for any number. `scenarios`: how many weight
    vectors the weights of the job hold, 0 for one that is not called a scenario.
    """

    name: QuestionName
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()
    colours: int = 0
    prices: bool = False
    conflict_prices: bool = False
    best: int = 0
    count: bool = False
    limit: int | None = None
    scenarios: int = 0

    def weights_of(self, vertices: int) -> int:
        """Return how many weights a job has that asks this about so many vertices and has any."""
        return vertices * max(1, self.scenarios)


@dataclass(frozen=True)
class Budget:
    """What a job may spend, defaults filled in; `fill` None is unlimited, `seconds` is running time."""

    fill: int | None = None
    states: int = 10**7
    seconds: float = 60.0
    memory_bytes: int = 2**30
