"""When to try again, and how long to wait before it."""

from __future__ import annotations

from dataclasses import dataclass

from nearchord.errors import NearchordError, NotReady, Unreachable

FIRST_PAUSE = 0.1
LARGEST_PAUSE = 5.0
GROWTH = 2.0
BLIND_TRIES = 4
"""Tries before anything was heard from the server: enough for a hiccup, soon over at a wrong address."""
UPLOAD_REASONS = frozenset({"UPLOAD_BUSY", "UPLOAD_OFFSET"})


@dataclass
class Retry:
    """Retries of one flow: backs off exponentially and gives up `patience` seconds after the last sign of life."""

    patience: float
    now: float
    heard: bool = False
    tries: int = 0

    def __post_init__(self) -> None:
        self.last_sign = self.now

    def sign_of_life(self, now: float) -> None:
        """Something arrived: start afresh."""
        self.heard, self.tries, self.last_sign = True, 0, now

    def pause_after(self, error: NearchordError, now: float) -> float:
        """Seconds to wait before the next try; raises `error` when there should be none."""
        if not worth_repeating(error):
            raise error
        self.heard = self.heard or error.retry_after is not None
        self.tries += 1
        pause: float = min(LARGEST_PAUSE, FIRST_PAUSE * GROWTH ** (self.tries - 1))
        pause = max(pause, error.retry_after or 0.0)
        if (not self.heard and self.tries >= BLIND_TRIES) or now + pause - self.last_sign > self.patience:
            raise error
        return pause


def worth_repeating(error: NearchordError) -> bool:
    """Whether the same call may succeed a little later."""
    return isinstance(error, Unreachable) or (isinstance(error, NotReady) and error.reason in UPLOAD_REASONS)
