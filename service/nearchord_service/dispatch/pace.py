"""How many jobs to lease ahead of free slots.

A job leased ahead saves the wait for the store between two short jobs, but stands behind whatever runs and cannot be
overtaken by a more urgent one. So it is done only while jobs have been short lately, and only for slots whose running
job is not long already.
"""

from __future__ import annotations

import math

SHORT_SECONDS = 0.05
"""Mean run time below which jobs count as short."""

LONG_RUN_SECONDS = 0.25
"""A job that has run so long is not short, whatever the mean says."""

AHEAD_PER_SLOT = 2
"""Jobs leased ahead for a slot with short jobs."""

_WEIGHT = 0.2


class Pace:
    """Exponentially weighted mean of run times; unknown counts as long."""

    def __init__(self) -> None:
        self._mean = math.inf

    def ran(self, seconds: float) -> None:
        """Take in the run time of an ended job."""
        known = self._mean < math.inf
        self._mean = self._mean + _WEIGHT * (seconds - self._mean) if known else seconds

    def ahead(self, quick_slots: int) -> int:
        """Return how many jobs may wait ahead, given the slots without a long run."""
        return AHEAD_PER_SLOT * quick_slots if self._mean < SHORT_SECONDS else 0
