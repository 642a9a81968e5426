"""A worker process: takes one task at a time from its socket until that closes."""

from __future__ import annotations

import contextlib
import logging
import mmap
import socket
import time
from dataclasses import replace
from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord_service.work import runner
from nearchord_service.work.local import wire
from nearchord_service.work.local.cells import MONITOR_CELLS, STARTED, STRIDE
from nearchord_service.work.local.limits import Meter
from nearchord_service.work.local.messages import Answered, OutOfMemory
from nearchord_service.work.port import Task

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from nearchord_service.work.kept import Shelf

_LOG = logging.getLogger(__name__)


def serve(sock: socket.socket, block: mmap.mmap, slot: int, solver: Any, shelf: Shelf | None) -> None:
    """Solve tasks until the server closes the socket or a task exceeds its memory."""
    worker = Worker(np.frombuffer(block, np.int64)[slot * STRIDE : (slot + 1) * STRIDE], solver, shelf)
    with contextlib.suppress(EOFError, ConnectionError):
        while True:
            task, _ = wire.receive(sock)
            assert isinstance(task, Task)
            end = worker.solve(task)
            wire.send(sock, end)
            if isinstance(end, OutOfMemory):
                return
            if shelf is not None:
                shelf.store()


class Worker:
    """Solves tasks under their memory limits; `cells` int64[STRIDE] are its slot's."""

    def __init__(self, cells: NDArray[np.int64], solver: Any, shelf: Shelf | None = None) -> None:
        self._cells = cells
        self._solver = solver
        self._shelf = shelf
        self._meter = Meter()
        self._fresh_bytes = self._meter.resident_bytes()

    def solve(self, task: Task) -> Answered | OutOfMemory:
        """Solve one task."""
        self._cells[STARTED] = time.monotonic_ns()
        meter = self._meter
        meter.reset_peak()
        try:
            with meter.limited(task.budget.memory_bytes):
                answer = runner.answer(task, self._solver, self._cells[:MONITOR_CELLS], shelf=self._shelf)
        except MemoryError:
            _LOG.warning("job %s, attempt %d: out of memory", task.key.job_id, task.key.attempt, exc_info=True)
            return OutOfMemory(meter.peak_bytes())
        answer = replace(answer, peak_memory_bytes=meter.peak_bytes())
        return Answered(answer, meter.resident_bytes() - self._fresh_bytes)
