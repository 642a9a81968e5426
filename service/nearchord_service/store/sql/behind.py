"""Syncing behind a writer: bytes go to the disk while more arrive, so that little is left to wait for at the end."""

from __future__ import annotations

from concurrent.futures import Future, ThreadPoolExecutor

from nearchord_service.store.sql.disk import Disk

STEP = 8 << 20
"""Bytes after which those written so far are sent to the disk."""


class Behind:
    """Syncs one file on a thread of its own, which begins with the first work for it.

    That takes a main thread that has not ended yet, as a server's has not while uploads are under way.
    """

    def __init__(self, disk: Disk, descriptor: int) -> None:
        """`descriptor` stays open until `close`."""
        self._disk = disk
        self._descriptor = descriptor
        self._thread = ThreadPoolExecutor(1, thread_name_prefix="content-sync")
        self._early: list[Future[None]] = []
        self._since = 0

    def wrote(self, count: int) -> None:
        """Note bytes written."""
        self._since += count
        if self._since >= STEP:
            self._since = 0
            self._early.append(self._thread.submit(self._disk.flush, self._descriptor))

    def sync(self) -> Future[None]:
        """Begin to make everything durable; the result raises OSError when any of it failed, now or before."""
        return self._thread.submit(self._sync)

    def _sync(self) -> None:
        # A system tells of lost bytes once: what an earlier call was told must not be forgotten.
        for flushed in self._early:
            flushed.result()
        self._disk.sync(self._descriptor)

    def close(self) -> None:
        """Wait for the work under way and end the thread. Safe to repeat."""
        self._thread.shutdown(wait=True)
