"""What the queue needs all the time, whoever works on it: lapsed leases, missed start-by times, retention."""

from __future__ import annotations

import logging

from nearchord_service.dispatch.observer import DispatchObserver
from nearchord_service.dispatch.ticker import Ticker
from nearchord_service.store.port import Retention, Store

_LOG = logging.getLogger(__name__)


class Upkeep:
    """Runs the store's housekeeping at intervals."""

    def __init__(
        self,
        store: Store,
        *,
        retention: Retention,
        observer: DispatchObserver,
        expiry_seconds: float = 5.0,
        retention_seconds: float = 60.0,
    ) -> None:
        self._store = store
        self._retention = retention
        self._observer = observer
        self._parts = (
            Ticker("lease expiry", expiry_seconds, self._expire_leases),
            Ticker("start-by expiry", expiry_seconds, self._expire_overdue),
            Ticker("retention", retention_seconds, self._retain),
        )

    def start(self) -> None:
        """Begin."""
        for part in self._parts:
            part.start()

    def stop(self) -> None:
        """End, waiting for rounds under way. Safe to repeat, and before `start`."""
        for part in self._parts:
            part.stop()

    def _expire_leases(self) -> None:
        if lost := self._store.expire_leases():
            _LOG.warning("%d leases ran out; their jobs wait again or end as BROKEN", lost)
            self._observer.leases_lost(lost)

    def _expire_overdue(self) -> None:
        if missed := self._store.expire_overdue():
            _LOG.info("%d jobs missed their start-by time", missed)

    def _retain(self) -> None:
        dropped = self._store.retain(self._retention)
        if dropped.jobs or dropped.contents or dropped.uploads:
            _LOG.info("retention dropped %s", dropped)
