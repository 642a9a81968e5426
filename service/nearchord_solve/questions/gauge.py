"""Values of a sub-problem, told to the monitor in the terms of the question."""

from dataclasses import dataclass

from nearchord_solve.monitor import Monitor


@dataclass(frozen=True)
class Gauge:
    """The question's value is ``offset + sign * value`` of the sub-problem; ``sign`` is 1 or -1."""

    monitor: Monitor
    offset: int
    sign: int

    def incumbent(self, value: int) -> None:
        """Tell the monitor of the best value so far."""
        self.monitor.incumbent(self.offset + self.sign * value)

    def bound(self, value: int) -> None:
        """Tell the monitor of the best bound so far."""
        self.monitor.bound(self.offset + self.sign * value)
