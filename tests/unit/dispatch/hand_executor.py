"""An executor whose tasks end when the test says so."""

from __future__ import annotations

import threading

from nearchord_service.model.answer import Answer
from nearchord_service.model.event import Phase, Progress
from nearchord_service.model.stage import Verdict
from nearchord_service.work.port import LossCause, Lost, SlotFigures, Solved

WAIT = 10.0
SEEN = Progress(Phase.SWEEP, 0.5, 1.0, fill=2, incumbent=4, bound=9)


class HandExecutor:
    """`slots` slots; `running` maps job ids to their keys. With `at_once`, tasks are solved as they come."""

    def __init__(self, slots=2, at_once=False):
        self.slots = slots
        self.at_once = at_once
        self.changed = threading.Condition()
        self.running = {}
        self.taken = []
        self.cancelled = []
        self.starts = 0
        self.stops = []
        self.listener = None
        self.on_run = None

    def start(self, listener):
        self.starts += 1
        self.listener = listener
        listener.slots_changed()

    def stop(self, grace_seconds):
        self.stops.append(grace_seconds)
        for name in list(self.running):
            self.lose(name, LossCause.SHUTDOWN)

    def free(self):
        with self.changed:
            return 0 if self.stops or self.listener is None else max(0, self.slots - len(self.running))

    def run(self, task):
        if self.on_run is not None:
            self.on_run(task)
        with self.changed:
            self.running[task.key.job_id] = task.key
            self.taken.append(task)
            self.changed.notify_all()
        if self.at_once:
            self.solve(task.key.job_id)

    def cancel(self, key):
        with self.changed:
            self.cancelled.append(key)
            self.changed.notify_all()

    def figures(self):
        with self.changed:
            return SlotFigures(0, self.slots - len(self.running), len(self.running), 1.0)

    # For tests

    def solve(self, name, verdict=Verdict.PROVEN):
        self._end(name, Solved(Answer(verdict, "done by hand")))

    def lose(self, name, cause):
        self._end(name, Lost(cause, f"lost by hand: {cause}", SEEN))

    def show(self, name, progress=SEEN):
        self.listener.progressed(self.running[name], progress)

    def _end(self, name, end):
        with self.changed:
            key = self.running.pop(name)
        self.listener.ended(key, end)

    def wait(self, condition):
        with self.changed:
            assert self.changed.wait_for(condition, WAIT), f"never came true: {self.__dict__}"
