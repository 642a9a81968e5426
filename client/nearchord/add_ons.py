"""What a question may ask for beside its plain answer, checked: prices, further sets, limits, scenarios, demands."""

from __future__ import annotations

import operator
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from nearchord import canonical
from nearchord.errors import BadInput

NAMES = frozenset({"colours", "prices", "conflict_prices", "best", "count", "limit", "scenarios"})
"""Fields of questions beside their pins that the messages of the contract have too."""

MOST_BEST = 1_000
MOST_SCENARIOS = 10_000
MOST_LIMIT = 2**32 - 1

Vectors = NDArray[Any] | Sequence[Sequence[int]]
"""Weight vectors, one a row."""


def flag(field: str, given: object) -> bool:
    """True or False; BadInput otherwise."""
    if not isinstance(given, bool | np.bool_):
        raise BadInput(f"{field} is {given!r}", f"write {field}=True or {field}=False")
    return bool(given)


def whole(field: str, given: object, most: int) -> int:
    """A whole number from 0 to `most`; BadInput otherwise."""
    try:
        number = operator.index(given)  # type: ignore[arg-type]
    except TypeError:
        number = -1
    if not 0 <= number <= most:
        raise BadInput(f"{field} is {given!r}", f"give a whole number from 0 to {most}")
    return number


def scenario_rows(given: Vectors | int | None) -> NDArray[np.int64] | int | None:
    """Weight vectors as read-only int64[R, n], or how many there are; None for none.

    BadInput names scenario and place.
    """
    if given is None:
        return None
    if not isinstance(given, np.ndarray | Sequence):
        return whole("scenarios", given, MOST_SCENARIOS) or None
    try:
        rows = np.asarray(given)
    except ValueError:
        rows = np.zeros(0)
    if rows.ndim != 2 or not len(rows):
        raise BadInput("scenarios are not a table of numbers", "give one row a scenario, with a weight for each vertex")
    if len(rows) > MOST_SCENARIOS:
        raise BadInput(f"there are {len(rows)} scenarios", f"give at most {MOST_SCENARIOS}")
    result = np.empty(rows.shape, np.int64)
    for number, row in enumerate(rows):
        try:
            result[number] = canonical.weight_vector(rows.shape[1], row)
        except BadInput as wrong:
            raise BadInput(f"scenario {number}: {wrong.problem}", wrong.remedy) from None
    result.flags.writeable = False
    return result


def demand_vector(given: NDArray[Any] | Sequence[int] | None) -> NDArray[np.int64] | None:
    """Demands as read-only int64[n]; None for 1 each. BadInput names the first that is none."""
    if given is None:
        return None
    try:
        listed = np.asarray(given)
    except ValueError:
        listed = np.zeros((0, 0))
    if listed.ndim != 1:
        raise BadInput("demands are not a list of numbers", "give one whole number a vertex")
    return canonical.weight_vector(listed.size, listed, "demand")


def check_company(asked: Mapping[str, bool]) -> None:
    """BadInput where `limit` or `scenarios` is asked for beside another add-on."""
    given = [field for field, there in asked.items() if there]
    for alone in ("limit", "scenarios"):
        others = [field for field in given if field != alone]
        if alone in given and others:
            raise BadInput(
                f"{alone} stands beside {', '.join(others)}, but goes with pins only", "ask for them in another job"
            )
