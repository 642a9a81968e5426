"""What a job may spend."""

from __future__ import annotations

import operator
from dataclasses import dataclass

from nearchord.errors import BadInput


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
