"""What a solve may spend."""

from dataclasses import dataclass

from nearchord_solve.errors import SolverError

DEFAULT_STATES = 10**7
DEFAULT_MEMORY = 2**30


@dataclass(frozen=True)
class Budget:
    """Limits of one solve.

    ``fill``: fill edges, None for no limit (0 = chordal graphs only).  ``states``: states of the dynamic
    program in bags that hold fill edges; bags without fill are swept without a table and cost none.
    ``memory``: bytes.  Seconds are the caller's business: it sets the monitor's STOP cell.
    """

    fill: int | None = None
    states: int = DEFAULT_STATES
    memory: int = DEFAULT_MEMORY

    def __post_init__(self) -> None:
        if self.fill is not None and self.fill < 0:
            raise SolverError("budget.fill", f"must be 0 or more, not {self.fill}")
        if self.states < 1:
            raise SolverError("budget.states", f"must be 1 or more, not {self.states}")
        if self.memory < 1:
            raise SolverError("budget.memory", f"must be 1 byte or more, not {self.memory}")
