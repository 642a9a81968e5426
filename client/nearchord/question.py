"""What a job asks of a graph."""

from __future__ import annotations

import operator
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, fields
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from nearchord import add_ons
from nearchord.errors import BadInput

MOST_COLOURS = 4

Pin = int | str
"""A vertex: its number from 0, or its name in the graph."""


@dataclass(frozen=True)
class Question:
    """Base of all questions. `maximises`: whether a larger value is better; `bound` is on the other side of it.
    `takes_weights`: whether the weights of the graph are a part of it."""

    name: ClassVar[str] = ""
    maximises: ClassVar[bool] = True
    takes_weights: ClassVar[bool] = False

    @property
    def vectors(self) -> NDArray[np.int64] | None:
        """What the job has in the place of the graph's weights: int64[n] demands, or int64[R, n] scenarios; or None."""
        return None

    @property
    def scenario_count(self) -> int:
        """How many weight vectors it is asked for; 0 where the graph's weights are the only ones."""
        return 0

    @classmethod
    def add_ons(cls) -> list[str]:
        """Its fields beside pins and demands."""
        return [one.name for one in fields(cls) if one.name in add_ons.NAMES]


@dataclass(frozen=True)
class Choice(Question):
    """Base of the questions that choose vertices: they take weights and pins, the others take the graph alone.

    `must` are vertices that have to be chosen, `never` vertices that must not be; each is a number from 0 or a name of
    the graph. Pins that contradict each other are no error: the verdict says INFEASIBLE.

    Some take `scenarios`: weight vectors, one a row, that are answered each for itself in one job (`Answer.scenarios`);
    the weights of the graph are not used then. A number of scenarios instead of vectors stands in the question of an
    answer, and beside `Addresses` whose weights hold so many vectors. Questions are compared without their vectors.
    Some take `prices`: what each vertex would cost (`Answer.price_in`, `Answer.price_out`).
    """

    takes_weights: ClassVar[bool] = True
    must: tuple[Pin, ...] = ()
    never: tuple[Pin, ...] = ()

    def __post_init__(self) -> None:
        for name in ("must", "never"):
            self._set(name, _pins(name, getattr(self, name)))

    def _set(self, field: str, value: object) -> None:
        object.__setattr__(self, field, value)

    @property
    def vectors(self) -> NDArray[np.int64] | None:
        """See `Question.vectors`."""
        given = getattr(self, "scenarios", None)
        return given if isinstance(given, np.ndarray) else None

    @property
    def scenario_count(self) -> int:
        """See `Question.scenario_count`."""
        given = getattr(self, "scenarios", None)
        return len(given) if isinstance(given, np.ndarray) else given or 0


def _pins(field: str, pins: Iterable[Pin]) -> tuple[Pin, ...]:
    if isinstance(pins, str):
        raise BadInput(f"{field} is the single word {pins!r}", f"write {field}=[{pins!r}]")
    return tuple(pin if isinstance(pin, str) else _vertex(field, pin) for pin in pins)


def _vertex(field: str, pin: object) -> int:
    try:
        return operator.index(pin)  # type: ignore[arg-type]
    except TypeError:
        raise BadInput(
            f"{field} has {pin!r}, which is neither a vertex number nor a name", "give numbers from 0, or names"
        ) from None


@dataclass(frozen=True)
class IndependentSet(Choice):
    """Heaviest set of vertices with no edge inside: the best conflict-free choice on one channel.

    `conflict_prices`: what dropping each edge would gain (`Answer.conflict_price`). `best`: how many of the best sets,
    0 to 1,000 (`Answer.best`; 0 and 1 give the choice alone). `count`: how many sets are as heavy as the best
    (`Answer.count`). `limit`: most vertices chosen, None for any number. `limit` and `scenarios` go with pins only.
    """

    name: ClassVar[str] = "independent-set"
    prices: bool = False
    conflict_prices: bool = False
    best: int = 0
    count: bool = False
    limit: int | None = None
    scenarios: add_ons.Vectors | int | None = field(default=None, compare=False)

    def __post_init__(self) -> None:
        super().__post_init__()
        for name in ("prices", "conflict_prices", "count"):
            self._set(name, add_ons.flag(name, getattr(self, name)))
        self._set("best", add_ons.whole("best", self.best, add_ons.MOST_BEST))
        if self.limit is not None:
            self._set("limit", add_ons.whole("limit", self.limit, add_ons.MOST_LIMIT))
        self._set("scenarios", add_ons.scenario_rows(self.scenarios))
        add_ons.check_company(
            {
                "prices": self.prices,
                "conflict_prices": self.conflict_prices,
                "best": self.best > 1,
                "count": self.count,
                "limit": self.limit is not None,
                "scenarios": self.scenario_count > 0,
            }
        )


@dataclass(frozen=True)
class VertexCover(Choice):
    """Lightest set of vertices touching every edge: the cheapest requests to withdraw."""

    name: ClassVar[str] = "vertex-cover"
    maximises: ClassVar[bool] = False


@dataclass(frozen=True)
class Clique(Choice):
    """Heaviest set of pairwise adjacent vertices: the tightest bottleneck."""

    name: ClassVar[str] = "clique"


@dataclass(frozen=True)
class ColourableSubgraph(Choice):
    """Heaviest induced subgraph that `colours` (1 to 4) suffice for: the best choice on so many channels. The answer
    has them in `colour`. With two, what is left out is the cheapest odd cycle transversal."""

    name: ClassVar[str] = "colourable-subgraph"
    colours: int = 2
    prices: bool = False
    scenarios: add_ons.Vectors | int | None = field(default=None, compare=False)

    def __post_init__(self) -> None:
        super().__post_init__()
        if not isinstance(self.colours, int) or not 1 <= self.colours <= MOST_COLOURS:
            raise BadInput(f"colours is {self.colours!r}", f"give a whole number from 1 to {MOST_COLOURS}")
        self._set("prices", add_ons.flag("prices", self.prices))
        self._set("scenarios", add_ons.scenario_rows(self.scenarios))
        add_ons.check_company({"prices": self.prices, "scenarios": self.scenario_count > 0})


@dataclass(frozen=True)
class InducedForest(Choice):
    """Heaviest induced forest: the loop-free choice; what is left out is the cheapest feedback vertex set."""

    name: ClassVar[str] = "induced-forest"
    prices: bool = False
    scenarios: add_ons.Vectors | int | None = field(default=None, compare=False)

    def __post_init__(self) -> None:
        super().__post_init__()
        self._set("prices", add_ons.flag("prices", self.prices))
        self._set("scenarios", add_ons.scenario_rows(self.scenarios))
        add_ons.check_company({"prices": self.prices, "scenarios": self.scenario_count > 0})


@dataclass(frozen=True)
class Plan(Question):
    """Base of the questions about everybody: no vertex is left out, and the weights of the graph play no part.

    `demands`: how much each vertex needs, n whole numbers of at least 0; None for 1 each. They do not stand in the
    question of an answer, and questions are compared without them.
    """

    maximises: ClassVar[bool] = False
    demands: NDArray[Any] | Sequence[int] | None = field(default=None, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "demands", add_ons.demand_vector(self.demands))

    @property
    def vectors(self) -> NDArray[np.int64] | None:
        """See `Question.vectors`."""
        return self.demands if isinstance(self.demands, np.ndarray) else None


@dataclass(frozen=True)
class Colouring(Plan):
    """Fewest colours for all vertices, so that no edge has a colour at both ends: the channel plan for everybody. A
    vertex gets as many colours as it needs (`Answer.colours_of`)."""

    name: ClassVar[str] = "colouring"


@dataclass(frozen=True)
class FractionalColouring(Plan):
    """Shortest frame in which every vertex is on for its share, and no two ends of an edge at a time: the airtime plan.
    The value is an exact fraction; the answer has `shares`, and `bottleneck` where the bound was reached."""

    name: ClassVar[str] = "fractional-colouring"


@dataclass(frozen=True)
class Fill(Question):
    """Fewest edges whose addition makes the graph chordal: how far the conflict data is from well-behaved, and which
    pairs break it. The answer has `fill_edges` and the classes that the graph belongs to (`recognition`)."""

    name: ClassVar[str] = "fill"
    maximises: ClassVar[bool] = False


@dataclass(frozen=True)
class Structure(Question):
    """How the graph falls apart and what each question would cost: is an exact answer affordable, before paying. The
    value is the fill of the triangulation found; the predictions are in the answer's `structure`."""

    name: ClassVar[str] = "structure"
    maximises: ClassVar[bool] = False


QUESTIONS: dict[str, type[Question]] = {
    kind.name: kind
    for kind in (
        IndependentSet,
        VertexCover,
        Clique,
        ColourableSubgraph,
        InducedForest,
        Colouring,
        FractionalColouring,
        Fill,
        Structure,
    )
}
"""Every question by its name on the command line and in metrics."""


def pins_of(question: Question) -> tuple[tuple[Pin, ...], tuple[Pin, ...]]:
    """`must` and `never` of a question; both empty where it takes none."""
    return (question.must, question.never) if isinstance(question, Choice) else ((), ())
