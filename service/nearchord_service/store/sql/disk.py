"""The data folder: its lock, its content files, and the words for what can go wrong with it.

Every write to a file (not to the database) goes through `Disk`, so a test can make any of them fail.
"""

from __future__ import annotations

import errno
import fcntl
import os
import secrets
from pathlib import Path

from nearchord_service.model.errors import StoreUnavailable

_REMEDIES = {
    errno.ENOSPC: "free some space on that file system, then try again",
    errno.EDQUOT: "raise the disk quota of the server's user, or free some space, then try again",
    errno.EROFS: "mount that file system for writing",
    errno.EACCES: "give the server's user read and write access to it",
    errno.EPERM: "give the server's user read and write access to it",
    errno.EMFILE: "raise the server's limit of open files",
    errno.EIO: "check the disk, and restore the data folder from a backup if it is damaged",
}


def disk_trouble(place: Path, fault: OSError) -> StoreUnavailable:
    """Return the error for a failed file operation, with its place and remedy."""
    what = os.strerror(fault.errno) if fault.errno else str(fault)
    remedy = _REMEDIES.get(fault.errno or 0, "check the file system that holds the data folder, then try again")
    return StoreUnavailable(f"{place}: {what}; {remedy}")


def new_file_name(address: str) -> str:
    """Return a name that no other file has, also not one of the same bytes that is on its way out."""
    return f"{address}-{secrets.token_hex(4)}"


class Disk:
    """Files of one data folder."""

    def __init__(self, data: Path) -> None:
        self.data = data
        self.content = data / "content"
        self._lock: int | None = None

    def prepare(self) -> None:
        """Make the folders and take the lock; raises StoreUnavailable when another server has it."""
        try:
            self.content.mkdir(parents=True, exist_ok=True, mode=0o700)
            descriptor = os.open(self.data / "lock", os.O_RDWR | os.O_CREAT | os.O_CLOEXEC, 0o600)
        except OSError as fault:
            raise disk_trouble(self.data, fault) from fault
        try:
            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as fault:
            holder = os.pread(descriptor, 32, 0).decode("ascii", "replace").strip() or "unknown"
            os.close(descriptor)
            raise StoreUnavailable(
                f"the data folder {self.data} is in use by another server (process {holder}): "
                "stop that server, or choose another data folder"
            ) from fault
        os.ftruncate(descriptor, 0)
        os.pwrite(descriptor, f"{os.getpid()}\n".encode(), 0)
        self._lock = descriptor

    def leave(self) -> None:
        """Give the lock back; safe to repeat."""
        if self._lock is not None:
            os.close(self._lock)
            self._lock = None

    def path(self, name: str) -> Path:
        """Return where a content file is."""
        return self.content / name

    def open(self, name: str, keep: int) -> int:
        """Open a content file for writing after its first `keep` bytes, made if missing; the rest is cut off."""
        descriptor = os.open(self.path(name), os.O_RDWR | os.O_CREAT | os.O_CLOEXEC, 0o600)
        os.ftruncate(descriptor, keep)
        os.lseek(descriptor, keep, os.SEEK_SET)
        return descriptor

    def write(self, descriptor: int, piece: bytes | memoryview) -> None:
        """Write all of a piece."""
        view = memoryview(piece)
        while view:
            view = view[os.write(descriptor, view) :]

    def flush(self, descriptor: int) -> None:
        """Bring the bytes of a content file that were written so far to the disk."""
        os.fdatasync(descriptor)

    def sync(self, descriptor: int) -> None:
        """Make a content file and its name durable."""
        os.fsync(descriptor)
        folder = os.open(self.content, os.O_RDONLY | os.O_CLOEXEC)
        try:
            os.fsync(folder)
        finally:
            os.close(folder)

    def remove(self, name: str) -> None:
        """Remove a content file; no matter if it is gone."""
        self.path(name).unlink(missing_ok=True)

    def size(self, name: str) -> int:
        """Return the length of a content file, 0 when it is missing."""
        try:
            return self.path(name).stat().st_size
        except FileNotFoundError:
            return 0
