"""The shared block: a few words per slot that the solver writes, the server samples, and through which it says stop.

The first sixteen words of a slot are the cells of `nearchord_solve.Monitor`; their positions are repeated here because
the server process must not load the solver (a test holds the two together). No locks: every word is one aligned store.
"""

from __future__ import annotations

import mmap
import os

from nearchord_service.model.event import Phase, Progress

MONITOR_CELLS = 16
STOP, PHASE, STEP, STEPS, FILL, FILL_LOWER, BAGS_DONE, BAGS, STATES = range(9)
HAS_INCUMBENT, INCUMBENT, HAS_BOUND, BOUND = range(9, 13)
STARTED = MONITOR_CELLS
"""When the worker began the task: nanoseconds of the system-wide monotonic clock, 0 before."""

STRIDE = 32
_WORD = 8
_PHASES = tuple(Phase)
_FRESH = (0, 0, 0, 0, -1, -1, -1, -1, -1, *(0,) * (STRIDE - 9))

STOP_SECONDS = 1
STOP_CANCEL = 2


class CellBlock:
    """Cells of all slots in one shared memory file; `file` is its descriptor, for a child to map."""

    def __init__(self, slots: int) -> None:
        self.file = os.memfd_create("nearchord-cells")
        os.ftruncate(self.file, size_bytes(slots))
        self._map = mmap.mmap(self.file, size_bytes(slots))
        self._words = memoryview(self._map).cast("q")

    def clear(self, slot: int) -> None:
        """Make the cells of a slot fresh for a task; its worker is idle."""
        for i, word in enumerate(_FRESH):
            self._words[slot * STRIDE + i] = word

    def ask_stop(self, slot: int, why: int) -> None:
        """Ask the solve in a slot to stop (STOP_SECONDS or STOP_CANCEL)."""
        self._words[slot * STRIDE + STOP] = why

    def started(self, slot: int) -> float | None:
        """Return when the worker began its task, on `time.monotonic`; None before."""
        return self._words[slot * STRIDE + STARTED] / 1e9 or None

    def sample(self, slot: int, seconds: float) -> Progress:
        """Return what the solve in a slot shows now."""
        word = self._words[slot * STRIDE : (slot + 1) * STRIDE].tolist()
        return Progress(
            phase=_PHASES[min(max(word[PHASE], 0), len(_PHASES) - 1)],
            fraction_done=min(max(word[STEP] / word[STEPS], 0.0), 1.0) if word[STEPS] > 0 else 0.0,
            seconds=seconds,
            fill=_known(word[FILL]),
            fill_lower_bound=_known(word[FILL_LOWER]),
            bags_done=_known(word[BAGS_DONE]),
            bags=_known(word[BAGS]),
            states=_known(word[STATES]),
            incumbent=word[INCUMBENT] if word[HAS_INCUMBENT] == 1 else None,
            bound=word[BOUND] if word[HAS_BOUND] == 1 else None,
        )

    def close(self) -> None:
        """Give the memory back."""
        self._words.release()
        self._map.close()
        os.close(self.file)


def size_bytes(slots: int) -> int:
    """Return the size of the shared file for that many slots."""
    return slots * STRIDE * _WORD


def _known(word: int) -> int | None:
    return word if word >= 0 else None
