"""The settings of one server as a value."""

from __future__ import annotations

import ipaddress
from dataclasses import dataclass
from pathlib import Path

from nearchord_service.model.question import Budget
from nearchord_service.store.port import Limits, Retention


@dataclass(frozen=True)
class Address:
    """A TCP address to listen on; port 0 takes a free one."""

    host: str
    port: int

    @property
    def loopback(self) -> bool:
        """Only this machine can reach it."""
        if self.host == "localhost":
            return True
        try:
            return ipaddress.ip_address(self.host).is_loopback
        except ValueError:
            return False

    def __str__(self) -> str:
        return f"[{self.host}]:{self.port}" if ":" in self.host else f"{self.host}:{self.port}"


@dataclass(frozen=True)
class Settings:
    """What a server was told. Sizes in bytes, times in seconds; None in a `largest_...` or a retention is no limit."""

    data: Path
    listen: Address = Address("127.0.0.1", 7411)
    metrics: Address | None = Address("127.0.0.1", 7412)
    workers: int = 1
    allow_plaintext: bool = False
    exit_on_stdin_close: bool = False
    reflection: bool = True
    grace: float = 10.0
    log_level: str = "INFO"
    default_fill: int | None = None
    default_states: int = 10**7
    default_seconds: float = 60.0
    default_memory: int = 2**30
    largest_fill: int | None = None
    largest_states: int | None = 10**9
    largest_seconds: float | None = 3_600.0
    largest_memory: int | None = None
    inline_bytes: int = 2**20
    content_bytes: int = 2**31
    stored_bytes: int = 2**36
    batch_jobs: int = 100_000
    batch_bytes: int = 2**28
    unfinished_jobs: int = 200_000
    pins: int = 250_000
    answer_age: float | None = 30 * 86_400.0
    answer_bytes: int | None = 2**36
    event_age: float | None = 30 * 86_400.0
    content_age: float | None = 90 * 86_400.0
    retained_content_bytes: int | None = None
    upload_age: float = 86_400.0
    kept_bytes: int = 2**32

    @property
    def default_budget(self) -> Budget:
        """The budget of a job that names none."""
        return Budget(self.default_fill, self.default_states, self.default_seconds, self.default_memory)

    @property
    def limits(self) -> Limits:
        """Quotas of one owner."""
        return Limits(self.unfinished_jobs, self.stored_bytes)

    @property
    def retention(self) -> Retention:
        """How long ended things are kept."""
        return Retention(
            answer_age=self.answer_age,
            answer_bytes=self.answer_bytes,
            event_age=self.event_age,
            content_age=self.content_age,
            content_bytes=self.retained_content_bytes,
            upload_age=self.upload_age,
        )
