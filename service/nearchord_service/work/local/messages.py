"""What the processes of the pool say to each other."""

from __future__ import annotations

from dataclasses import dataclass

from nearchord_service.model.answer import Answer


@dataclass(frozen=True)
class Fork:
    """Server to nursery: fork a worker for a slot; its end of the task socket comes along."""

    slot: int


@dataclass(frozen=True)
class Kill:
    """Server to nursery: kill a worker. The nursery does it because only it knows that the number is not reused."""

    pid: int


@dataclass(frozen=True)
class Warming:
    """Nursery to server: how far the kernels are compiled."""

    fraction: float


@dataclass(frozen=True)
class Warm:
    """Nursery to server: kernels are hot, workers can be forked."""


@dataclass(frozen=True)
class Failed:
    """Nursery to server: warming failed; the nursery ends."""

    reason: str


@dataclass(frozen=True)
class Forked:
    """Nursery to server: a slot has its worker."""

    slot: int
    pid: int


@dataclass(frozen=True)
class Exited:
    """Nursery to server: a worker has ended; `status` as from os.waitstatus_to_exitcode."""

    pid: int
    status: int


@dataclass(frozen=True)
class Answered:
    """Worker to server: the task's answer, and by how much the worker's resident memory has grown since its fork."""

    answer: Answer
    grown_bytes: int


@dataclass(frozen=True)
class OutOfMemory:
    """Worker to server: the memory limit ended the task; the worker ends too."""

    peak_bytes: int
