"""A worker process: takes one task at a time from its socket until that closes."""

from __future__ import annotations

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

_LOG = logging.getLogger(__name__)


def serve(sock: socket.socket, block: mmap.mmap, slot: int, solver: Any) -> None:
    """Solve tasks until the server closes the socket or a task exceeds its memory."""
    cells: NDArray[np.int64] = np.frombuffer(block, np.int64)[slot * STRIDE : (slot + 1) * STRIDE]
    meter = Meter()
    while True:
        try:
            task, _ = wire.receive(sock)
        except (EOFError, ConnectionError):
            return
        assert isinstance(task, Task)
        end = _solve(task, solver, cells, meter)
        try:
            wire.send(sock, end)
        except ConnectionError:
            return
        if isinstance(end, OutOfMemory):
            return


def _solve(task: Task, solver: Any, cells: NDArray[np.int64], meter: Meter) -> Answered | OutOfMemory:
    """Solve one task under its memory limit; `cells` int64[STRIDE] are this slot's."""
    cells[STARTED] = time.monotonic_ns()
    meter.reset_peak()
    try:
        with meter.limited(task.budget.memory_bytes):
            answer = runner.answer(task, solver, cells[:MONITOR_CELLS])
    except MemoryError:
        _LOG.warning("job %s, attempt %d: out of memory", task.key.job_id, task.key.attempt, exc_info=True)
        return OutOfMemory(meter.peak_bytes())
    answer = replace(answer, peak_memory_bytes=meter.peak_bytes())
    return Answered(answer, meter.resident_bytes())
