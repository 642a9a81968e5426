"""A stage for executor tests: tasks by script, and a listener that can be waited on."""

from __future__ import annotations

import itertools
import struct
import threading

import numpy as np
from nearchord_service.model.content import Bytes
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.work.port import Task, TaskKey

WAIT = 30.0
"""Deadline of every wait; nothing normally takes nearly so long."""

_NUMBER = itertools.count()


def edgeless(n):
    """Canonical bytes of a graph without edges."""
    return struct.pack("<IQ", n, 0) + bytes(8 * (n + 1))


def task(script, *, seconds=30.0, memory_bytes=2**30, vertices=4, graph=None, weights=None, question=None, job=None):
    """A task that makes the scripted solver do `script`."""
    return Task(
        key=TaskKey(job or f"job-{next(_NUMBER)}", 1),
        graph=graph or Bytes(edgeless(vertices), None),
        weights=None if weights is None else Bytes(np.array(weights, "<i8").tobytes(), None),
        vertices=vertices,
        edges=0,
        question=question or Question(QuestionName.INDEPENDENT_SET),
        budget=Budget(states=int(script), seconds=seconds, memory_bytes=memory_bytes),
        when_over=WhenOver.BOUND,
    )


class Audience:
    """A listener that remembers everything; `wait` returns when a condition on it holds, or fails at a deadline."""

    def __init__(self):
        self.changed = threading.Condition()
        self.ends = []
        self.progress = []
        self.slot_changes = 0

    def progressed(self, key, progress):
        with self.changed:
            self.progress.append((key, progress))
            self.changed.notify_all()

    def ended(self, key, end):
        with self.changed:
            self.ends.append((key, end))
            self.changed.notify_all()

    def slots_changed(self):
        with self.changed:
            self.slot_changes += 1
            self.changed.notify_all()

    def wait(self, condition):
        with self.changed:
            assert self.changed.wait_for(condition, WAIT), f"never came true; ends: {self.ends}"

    def end_of(self, one):
        """Wait for the end of a task and return it."""
        self.wait(lambda: any(key == one.key for key, _ in self.ends))
        (end,) = [end for key, end in self.ends if key == one.key]
        return end

    def first_progress(self, one):
        """Wait for the first progress of a task and return it."""
        self.wait(lambda: any(key == one.key for key, _ in self.progress))
        return next(seen for key, seen in self.progress if key == one.key)


class Stage:
    """An executor at work with its audience."""

    def __init__(self, executor):
        self.executor = executor
        self.audience = Audience()
        executor.start(self.audience)

    def ready(self, slots):
        """Wait until that many slots are free."""
        self.audience.wait(lambda: self.executor.free() == slots)

    def run(self, script, **options):
        """Hand a task over."""
        one = task(script, **options)
        self.executor.run(one)
        return one

    def end(self, script, **options):
        """Run a task to its end."""
        return self.audience.end_of(self.run(script, **options))
