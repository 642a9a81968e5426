"""Which add-ons go together, and in what range they are."""

from typing import Protocol

from nearchord_solve.errors import SolverError

MOST_BEST = 1000


class Asked(Protocol):
    """The add-ons of a question; see :class:`nearchord_solve.IndependentSet`."""

    @property
    def prices(self) -> bool:
        """Prices of the vertices."""

    @property
    def conflict_prices(self) -> bool:
        """Prices of the edges."""

    @property
    def best(self) -> int:
        """How many of the best sets."""

    @property
    def count(self) -> bool:
        """How many sets are best."""

    @property
    def limit(self) -> int | None:
        """Most vertices of the set."""

    @property
    def scenarios(self) -> int:
        """How many vectors of weights."""


def check_terms(asked: Asked) -> None:
    """SolverError, naming the field, for a value out of range or add-ons that do not go together."""
    if not 0 <= asked.best <= MOST_BEST:
        raise SolverError("question.best", f"must be 0 to {MOST_BEST}, not {asked.best}")
    if asked.scenarios < 0:
        raise SolverError("question.scenarios", f"must be 0 or more, not {asked.scenarios}")
    if asked.limit is not None and asked.limit < 0:
        raise SolverError("question.limit", f"must be 0 or more, not {asked.limit}")
    for alone, given in (("limit", asked.limit is not None), ("scenarios", asked.scenarios > 0)):
        others = [name for name in _others(asked) if name != alone]
        if given and others:
            raise SolverError(
                f"question.{alone}", f"goes with no other add-on: ask for {others[0]} in a job of its own"
            )


def _others(asked: Asked) -> list[str]:
    """Names of the add-ons asked for."""
    wanted = {
        "prices": asked.prices,
        "conflict_prices": asked.conflict_prices,
        "best": asked.best > 1,
        "count": asked.count,
        "limit": asked.limit is not None,
        "scenarios": asked.scenarios > 0,
    }
    return [name for name, given in wanted.items() if given]
