"""One slot: its worker, its task, and when something is due about them."""

from __future__ import annotations

import math
import socket
from dataclasses import dataclass, field
from enum import StrEnum

from nearchord_service.model.event import Progress
from nearchord_service.work.local import wire
from nearchord_service.work.local.cells import STOP_CANCEL, STOP_SECONDS, CellBlock
from nearchord_service.work.port import LossCause, Task

SAMPLE_SECONDS = 0.2
"""Time between two looks at the progress of a task."""

QUIET_SECONDS = 1.0
"""A task whose figures stand still is shown at least this often, so that its seconds go on."""

START_SECONDS = 10.0
"""A worker that has not begun its task by then is taken for dead."""


KILL_SECONDS = 5.0
"""A worker that has not ended that long after it was to be killed has a nursery that does not work any more."""


class SlotState(StrEnum):
    """EMPTY -> STARTING -> IDLE <-> BUSY; IDLE and BUSY -> LEAVING -> EMPTY, and any -> EMPTY when a worker ends."""

    EMPTY = "empty"
    STARTING = "starting"
    IDLE = "idle"
    BUSY = "busy"
    LEAVING = "leaving"


@dataclass
class Run:
    """A task in a slot. Times are on `time.monotonic`; `kill_at` is set once the task was told to stop."""

    task: Task
    handed_at: float
    next_sample: float
    stop_cause: LossCause | None = None
    kill_at: float = math.inf
    killed: bool = False
    shown: Progress | None = None


@dataclass
class Slot:
    """State of one slot, changed only under the executor's lock."""

    index: int
    cells: CellBlock
    grace_seconds: float
    state: SlotState = SlotState.EMPTY
    sock: socket.socket | None = None
    pid: int | None = None
    run: Run | None = field(default=None)

    def begin(self, task: Task, now: float) -> None:
        """Hand a task to the idle worker; raises OSError when it is gone (its end is reported separately)."""
        assert self.sock is not None
        self.cells.clear(self.index)
        self.run = Run(task, now, now + min(SAMPLE_SECONDS, task.budget.seconds))
        self.state = SlotState.BUSY
        wire.send(self.sock, task)

    def seconds(self, now: float) -> float:
        """Return how long the task has run."""
        assert self.run is not None
        return max(0.0, now - (self.cells.started(self.index) or now))

    def progress(self, now: float) -> Progress:
        """Return what the task shows now."""
        return self.cells.sample(self.index, self.seconds(now))

    def due(self) -> float:
        """Return when to look at this slot again: the earliest of sample, deadline and kill."""
        if self.run is None:
            return math.inf
        if self.run.killed:
            return self.run.kill_at
        deadline = self._deadline() if self.run.stop_cause is None else math.inf
        return min(self.run.next_sample, deadline, self.run.kill_at)

    def stop(self, cause: LossCause, now: float) -> None:
        """Tell the task to stop, and have it killed when it has not ended after the grace."""
        assert self.run is not None
        self.run.stop_cause = cause
        self.run.kill_at = min(self.run.kill_at, now + self.grace_seconds)
        self.cells.ask_stop(self.index, STOP_CANCEL if cause is LossCause.CANCEL else STOP_SECONDS)

    def overdue(self, now: float) -> bool:
        """Tell a task past its seconds to stop; say whether the worker must be killed now."""
        if self.run is None or self.run.killed:
            return False
        if self.run.stop_cause is None and now >= self._deadline():
            if self.cells.started(self.index) is None:
                return True
            self.stop(LossCause.SECONDS, now)
        return now >= self.run.kill_at

    def stuck(self, now: float) -> bool:
        """Say whether the worker should have been dead for long."""
        return self.run is not None and self.run.killed and now >= self.run.kill_at

    def sample(self, now: float) -> Progress | None:
        """Return progress when it is time for a look and there is something to show."""
        if self.run is None or now < self.run.next_sample:
            return None
        self.run.next_sample = now + SAMPLE_SECONDS
        if self.cells.started(self.index) is None:
            return None
        seen, shown = self.progress(now), self.run.shown
        if shown is not None and seen.seconds < shown.seconds + QUIET_SECONDS and _same(seen, shown):
            return None
        self.run.shown = seen
        return seen

    def _deadline(self) -> float:
        """Running time counts from when the worker began."""
        assert self.run is not None
        began = self.cells.started(self.index)
        if began is None:
            return self.run.handed_at + START_SECONDS
        return began + self.run.task.budget.seconds

    def clear(self) -> None:
        """Forget the worker."""
        if self.sock is not None:
            self.sock.close()
        self.sock = self.pid = self.run = None
        self.state = SlotState.EMPTY


def _same(one: Progress, other: Progress) -> bool:
    return one.__dict__ | {"seconds": 0} == other.__dict__ | {"seconds": 0}
