"""A long-lived part that does one thing at intervals in a thread of its own."""

from __future__ import annotations

import logging
import threading
from collections.abc import Callable

from nearchord_service.model.errors import StoreUnavailable

_LOG = logging.getLogger(__name__)


class Ticker:
    """Calls `action` every `seconds`, first after one interval; an error ends the round, not the part."""

    def __init__(self, name: str, seconds: float, action: Callable[[], None]) -> None:
        self._name = name
        self._seconds = seconds
        self._action = action
        self._end = threading.Event()
        self._thread: threading.Thread | None = None

    def start(self) -> None:
        """Begin; a second start is harmless, and one after a stop does nothing."""
        if self._thread is None and not self._end.is_set():
            self._thread = threading.Thread(target=self._run, name=self._name, daemon=True)
            self._thread.start()

    def stop(self) -> None:
        """End, waiting for a round under way. Safe to repeat, and before `start`."""
        self._end.set()
        if self._thread is not None and self._thread is not threading.current_thread():
            self._thread.join()

    def _run(self) -> None:
        while not self._end.wait(self._seconds):
            try:
                self._action()
            except StoreUnavailable as error:
                _LOG.warning(
                    "%s: the store is not available, trying again in %g s: %s", self._name, self._seconds, error
                )
            except Exception:
                _LOG.exception("%s: a round failed", self._name)
