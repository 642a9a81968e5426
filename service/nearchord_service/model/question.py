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
    FILL = "fill"
    STRUCTURE = "structure"

    @property
    def chooses(self) -> bool:
        """Whether its answer is a set of vertices: only then does it take weights and pins."""
        return self not in (QuestionName.FILL, QuestionName.STRUCTURE)


class WhenOver(StrEnum):
    """What to do when the fill budget or the state budget does not suffice."""

    BOUND = "bound"
    STOP = "stop"


@dataclass(frozen=True)
class Question:
    """What a job asks. `must` and `never` are vertex numbers from 0, ascending, without repetition; both are empty
    for a question that does not choose vertices. `colours` is 0 for a question that takes none."""

    name: QuestionName
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()
    colours: int = 0


@dataclass(frozen=True)
class Budget:
    """What a job may spend, defaults filled in; `fill` None is unlimited, `seconds` is running time."""

    fill: int | None = None
    states: int = 10**7
    seconds: float = 60.0
    memory_bytes: int = 2**30
