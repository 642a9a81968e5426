"""The store behind `port.Store`, put together from its parts."""

from __future__ import annotations

from nearchord_service.store.sql.jobs import Jobs
from nearchord_service.store.sql.leases import Leases
from nearchord_service.store.sql.retention import Keeping


class SqlStore(Jobs, Leases, Keeping):
    """A store in one data folder: the database file, the content files and the lock."""
