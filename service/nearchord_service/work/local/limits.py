"""Memory of a worker process: a hard limit for one task, and what the task used."""

from __future__ import annotations

import os
import resource
from collections.abc import Iterator
from contextlib import contextmanager

_PAGE = os.sysconf("SC_PAGE_SIZE")
_HIGH_WATER_RESET = b"5"


class Meter:
    """Reads and limits this process's memory. Keeps its files open, because it is used around every task."""

    def __init__(self) -> None:
        self._statm = os.open("/proc/self/statm", os.O_RDONLY)
        try:
            self._clear: int | None = os.open("/proc/self/clear_refs", os.O_WRONLY)
        except OSError:
            self._clear = None

    def resident_bytes(self) -> int:
        """Return the resident memory now."""
        return int(os.pread(self._statm, 256, 0).split()[1]) * _PAGE

    def data_bytes(self) -> int:
        """Return what counts against RLIMIT_DATA now (the stack, counted here too, is small)."""
        return int(os.pread(self._statm, 256, 0).split()[5]) * _PAGE

    def peak_bytes(self) -> int:
        """Return the largest resident memory since `reset_peak` (since the fork where that is not possible)."""
        return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024

    def reset_peak(self) -> None:
        """Begin a new peak, where the system allows it."""
        if self._clear is not None:
            try:
                os.pwrite(self._clear, _HIGH_WATER_RESET, 0)
            except OSError:
                self._clear = None

    @contextmanager
    def limited(self, more_bytes: int) -> Iterator[None]:
        """Allow at most `more_bytes` of new private memory inside the block; beyond it allocations fail.

        RLIMIT_DATA counts private writable mappings, so mapped graph files do not count; RLIMIT_AS would count them and
        still miss how kernels allocate.
        """
        soft, hard = resource.getrlimit(resource.RLIMIT_DATA)
        limit = self.data_bytes() + more_bytes
        if hard != resource.RLIM_INFINITY:
            limit = min(limit, hard)
        resource.setrlimit(resource.RLIMIT_DATA, (limit, hard))
        try:
            yield
        finally:
            resource.setrlimit(resource.RLIMIT_DATA, (soft, hard))
