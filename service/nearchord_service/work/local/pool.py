"""The slots together: which task is where, and what every message and every passing moment means for them.

Everything here runs under the executor's lock. What listeners must hear is collected in `news` and told later.
"""

from __future__ import annotations

import contextlib
import logging
import math
import selectors
import socket
from collections import deque
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path

from nearchord_service.model.event import Progress
from nearchord_service.work.local import endings, wire
from nearchord_service.work.local.cells import CellBlock
from nearchord_service.work.local.messages import Answered, Exited, Failed, Forked, OutOfMemory, Warm, Warming
from nearchord_service.work.local.nursery_process import NurseryProcess
from nearchord_service.work.local.slot import KILL_SECONDS, Slot, SlotState
from nearchord_service.work.port import LossCause, Lost, SlotFigures, Solved, Task, TaskKey, TaskListener

News = Callable[[TaskListener], None]

_FIRST_DELAY, _LONGEST_DELAY = 0.5, 30.0
_LOG = logging.getLogger(__name__)


class Pool:
    """Slots, their nursery, and tasks that wait for a slot."""

    def __init__(
        self,
        slots: int,
        resident_limit_bytes: int,
        grace_seconds: float,
        solver: str,
        keep_folder: Path | None,
        keep_bytes: int,
    ) -> None:
        self.selector = selectors.DefaultSelector()
        self.news: list[News] = []
        self._cells = CellBlock(slots)
        self._slots = [Slot(i, self._cells, grace_seconds) for i in range(slots)]
        self._resident_limit_bytes = resident_limit_bytes
        self._begin_nursery = partial(NurseryProcess, self._cells.file, solver, keep_folder, keep_bytes)
        self._pending: deque[Task] = deque()
        self._nursery: NurseryProcess | None = None
        self._warm = False
        self._fraction = 0.0
        self._delay = _FIRST_DELAY
        self._start_at = 0.0

    # Tasks in

    def free(self) -> int:
        """Return how many tasks would begin at once."""
        return max(0, sum(slot.state is SlotState.IDLE for slot in self._slots) - len(self._pending))

    def add(self, task: Task, now: float) -> None:
        """Take a task; it begins now when a slot is idle."""
        self._pending.append(task)
        self._assign(now)

    def cancel(self, key: TaskKey, now: float) -> None:
        """Tell a task to stop, or drop it when it has not begun."""
        for slot in self._busy():
            if slot.run is not None and slot.run.task.key == key:
                slot.stop(LossCause.CANCEL, now)
                return
        self._drop_pending(LossCause.CANCEL, lambda task: task.key == key)

    def refuse(self, task: Task) -> None:
        """Take a task back to its giver, because nothing begins any more."""
        self._tell_end(task.key, endings.never_began(LossCause.SHUTDOWN))

    def shut(self) -> None:
        """Drop what has not begun, because nothing begins any more."""
        self._drop_pending(LossCause.SHUTDOWN, lambda _: True)

    def figures(self) -> SlotFigures:
        """Count slots by state."""
        states = [slot.state for slot in self._slots]
        idle, busy = states.count(SlotState.IDLE), states.count(SlotState.BUSY)
        return SlotFigures(len(states) - idle - busy, idle, busy, 1.0 if self._warm else self._fraction)

    def busy(self) -> bool:
        """Say whether any task is in a slot."""
        return any(slot.run is not None for slot in self._slots)

    # Time

    def due(self) -> float:
        """Return when `tick` has something to do."""
        start = self._start_at if self._nursery is None else math.inf
        return min([start, *(slot.due() for slot in self._slots)])

    def tick(self, now: float) -> None:
        """Do what is due."""
        if self._nursery is None and now >= self._start_at:
            self._start_nursery(now)
        for slot in self._busy():
            if slot.stuck(now):
                _LOG.error("worker %s does not end; the process that forks workers is replaced", slot.pid)
                self.lose_nursery(now, None)
                return
            if slot.overdue(now):
                self._kill(slot, now)
            elif (seen := slot.sample(now)) is not None and slot.run is not None:
                self._tell_progress(slot.run.task.key, seen)

    # Messages

    def hear_nursery(self, now: float) -> None:
        """Take every message of the nursery."""
        if self._nursery is None:
            return
        try:
            for message in _messages(self._nursery.control):
                self._heard(message, now)
        except (EOFError, ConnectionError):
            _LOG.error("the process that forks workers has ended; it is started again in %.1f s", self._delay)
            self.lose_nursery(now, None)

    def hear_worker(self, slot: Slot, now: float) -> None:
        """Take every message of a worker. When it is gone, the nursery will say so and how."""
        if slot.sock is None:
            return
        try:
            for message in _messages(slot.sock):
                self._answered(slot, message, now)
        except (EOFError, ConnectionError):
            slot.state = SlotState.LEAVING
            self._mute(slot)

    def lose_nursery(self, now: float, cause: LossCause | None) -> None:
        """End the nursery and with it all workers; tasks that have not answered are lost for `cause`."""
        nursery, self._nursery, self._warm, self._fraction = self._nursery, None, False, 0.0
        if nursery is not None:
            self.selector.unregister(nursery.control)
            nursery.end()
        for slot in self._slots:
            self._gone(slot, None, now, cause)
        self._start_at = now + self._delay
        self._delay = min(2 * self._delay, _LONGEST_DELAY)

    def close(self) -> None:
        """Give everything back; the nursery has ended."""
        self.selector.close()
        self._cells.close()

    # Inside

    def _busy(self) -> Iterator[Slot]:
        return (slot for slot in self._slots if slot.run is not None)

    def _assign(self, now: float) -> None:
        for slot in self._slots:
            if self._pending and slot.state is SlotState.IDLE:
                try:
                    slot.begin(self._pending.popleft(), now)
                except OSError:
                    self._kill(slot, now)

    def _start_nursery(self, now: float) -> None:
        try:
            self._nursery = self._begin_nursery()
        except OSError:
            _LOG.exception("cannot start the process that forks workers; trying again in %.1f s", self._delay)
            self._start_at = now + self._delay
            return
        self.selector.register(self._nursery.control, selectors.EVENT_READ, self.hear_nursery)

    def _heard(self, message: object, now: float) -> None:
        if isinstance(message, Warming):
            self._fraction = message.fraction
        elif isinstance(message, Warm):
            self._warm, self._fraction, self._delay = True, 1.0, _FIRST_DELAY
            for slot in self._slots:
                self._fork(slot)
        elif isinstance(message, Failed):
            _LOG.error("warming the solver failed, no job can run: %s", message.reason)
        elif isinstance(message, Forked):
            slot = self._slots[message.slot]
            slot.pid = message.pid
            if slot.sock is not None:
                slot.state = SlotState.IDLE
                self._freed(now)
        elif isinstance(message, Exited):
            for slot in self._slots:
                if slot.pid == message.pid:
                    self._gone(slot, message.status, now, None)
                    self._fork(slot)

    def _answered(self, slot: Slot, message: object, now: float) -> None:
        if slot.run is None:
            return
        task = slot.run.task
        if isinstance(message, OutOfMemory):
            end: Solved | Lost = endings.out_of_memory(task, message, slot.progress(now))
            grown = True
        else:
            assert isinstance(message, Answered)
            end, grown = Solved(message.answer), message.grown_bytes > self._resident_limit_bytes
        slot.run = None
        self._tell_end(task.key, end)
        if grown:
            self._kill(slot, now)
        elif slot.state is SlotState.BUSY:
            slot.state = SlotState.IDLE
            self._freed(now)

    def _gone(self, slot: Slot, status: int | None, now: float, cause: LossCause | None) -> None:
        """Forget a worker that has ended, after hearing what it said last."""
        slot.state = SlotState.LEAVING
        self.hear_worker(slot, now)
        if slot.run is not None:
            run = slot.run
            progress = slot.progress(now)
            lost = endings.killed(run.task, cause or run.stop_cause, status, slot.grace_seconds, progress)
            self._tell_end(run.task.key, lost)
        self._mute(slot)
        slot.clear()

    def _fork(self, slot: Slot) -> None:
        if self._nursery is None:
            return
        try:
            slot.sock = self._nursery.fork(slot.index)
        except OSError:
            _LOG.exception("cannot ask for a worker")
            return
        slot.state = SlotState.STARTING
        self.selector.register(slot.sock, selectors.EVENT_READ, lambda now: self.hear_worker(slot, now))

    def _kill(self, slot: Slot, now: float) -> None:
        """Have a worker killed; the nursery tells when it has ended, and its slot gets another."""
        slot.state = SlotState.LEAVING
        if slot.run is not None:
            slot.run.killed, slot.run.kill_at = True, now + KILL_SECONDS
        if self._nursery is not None and slot.pid is not None:
            with contextlib.suppress(OSError):
                self._nursery.kill_worker(slot.pid)

    def _mute(self, slot: Slot) -> None:
        if slot.sock is not None:
            self.selector.unregister(slot.sock)
            slot.sock.close()
            slot.sock = None

    def _drop_pending(self, cause: LossCause, which: Callable[[Task], bool]) -> None:
        dropped = [task for task in self._pending if which(task)]
        self._pending = deque(task for task in self._pending if not which(task))
        for task in dropped:
            self._tell_end(task.key, endings.never_began(cause))

    def _freed(self, now: float) -> None:
        self._assign(now)
        self.news.append(lambda listener: listener.slots_changed())

    def _tell_end(self, key: TaskKey, end: Solved | Lost) -> None:
        self.news.append(lambda listener: listener.ended(key, end))

    def _tell_progress(self, key: TaskKey, progress: Progress) -> None:
        self.news.append(lambda listener: listener.progressed(key, progress))


def _messages(sock: socket.socket) -> Iterator[object]:
    """Yield what has arrived; raises EOFError or ConnectionError when the other end is gone."""
    while True:
        try:
            message, _ = wire.receive(sock)
        except BlockingIOError:
            return
        yield message
