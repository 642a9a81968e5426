"""Two clocks read together: wall time for the ratios, processor time to judge how disturbed a run was."""

from dataclasses import dataclass
from time import perf_counter, process_time


@dataclass(frozen=True)
class Spent:
    """Seconds by the wall, and seconds of processor time that all threads of this process used meanwhile."""

    seconds: float
    cpu_seconds: float


class Watch:
    """Runs from its making."""

    def __init__(self) -> None:
        self._wall, self._cpu = perf_counter(), process_time()

    def read(self) -> Spent:
        """Time spent so far."""
        return Spent(perf_counter() - self._wall, process_time() - self._cpu)
