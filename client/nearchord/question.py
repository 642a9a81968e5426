"""What a job asks of a graph, and what it may spend."""

from __future__ import annotations

import operator
from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar

from nearchord.errors import BadInput

MOST_COLOURS = 4

Pin = int | str
"""A vertex: its number from 0, or its name in the graph."""


@dataclass(frozen=True)
class Question:
    """Base of all questions. `maximises`: whether a larger value is better; `bound` is on the other side of it."""

    name: ClassVar[str] = ""
    maximises: ClassVar[bool] = True


@dataclass(frozen=True)
class Choice(Question):
    """Base of the questions that choose vertices: they take weights and pins, the others take the graph alone.

    `must` are vertices that have to be chosen, `never` vertices that must not be; each is a number from 0 or a name of
    the graph. Pins that contradict each other are no error: the verdict says INFEASIBLE.
    """

    must: tuple[Pin, ...] = ()
    never: tuple[Pin, ...] = ()

    def __post_init__(self) -> None:
        for field in ("must", "never"):
            object.__setattr__(self, field, _pins(field, getattr(self, field)))


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
    """Heaviest set of vertices with no edge inside: the best conflict-free choice on one channel."""

    name: ClassVar[str] = "independent-set"


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

    def __post_init__(self) -> None:
        super().__post_init__()
        if not isinstance(self.colours, int) or not 1 <= self.colours <= MOST_COLOURS:
            raise BadInput(f"colours is {self.colours!r}", f"give a whole number from 1 to {MOST_COLOURS}")


@dataclass(frozen=True)
class InducedForest(Choice):
    """Heaviest induced forest: the loop-free choice; what is left out is the cheapest feedback vertex set."""

    name: ClassVar[str] = "induced-forest"


@dataclass(frozen=True)
class Colouring(Question):
    """Fewest colours for all vertices, so that no edge has a colour at both ends: the channel plan for everybody."""

    name: ClassVar[str] = "colouring"
    maximises: ClassVar[bool] = False


@dataclass(frozen=True)
class FractionalColouring(Question):
    """Shortest frame in which every vertex is on for its share, and no two ends of an edge at a time: the airtime plan.
    The value is a fraction."""

    name: ClassVar[str] = "fractional-colouring"
    maximises: ClassVar[bool] = False


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


@dataclass(frozen=True)
class Budget:
    """What a job may spend; None takes the server's default.

    `fill`: fill edges of a triangulation, 0 for chordal graphs only. `states`: states of the dynamic program, at least
    1. `seconds`: running time, queue wait not counted, above 0. `memory`: bytes, at least 1.
    """

    fill: int | None = None
    states: int | None = None
    seconds: float | None = None
    memory: int | None = None

    def __post_init__(self) -> None:
        for field in ("fill", "states", "memory"):
            self._whole(field, getattr(self, field))
        if self.seconds is not None and not isinstance(self.seconds, int | float):
            raise BadInput(f"budget seconds={self.seconds!r} is not a number", "give seconds, such as 30")

    def _whole(self, field: str, value: object) -> None:
        if value is None:
            return
        try:
            whole = operator.index(value)  # type: ignore[arg-type]
        except TypeError:
            raise BadInput(f"budget {field}={value!r} is not a whole number", "give a whole number") from None
        if not -(2**63) <= whole < 2**63:
            raise BadInput(f"budget {field}={whole} is out of range", "give a number below 2^63")
        object.__setattr__(self, field, whole)
