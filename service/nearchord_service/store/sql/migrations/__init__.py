"""Schema versions, applied forwards in order, each in one transaction with its mark in `schema_version`.

A released migration never changes. What differs between dialects is written as `$key`, `$bytes`, `$clustered`.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from string import Template

from sqlalchemy.engine.interfaces import DBAPICursor

from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.store.sql.migrations import v0001_first

VERSIONS: tuple[tuple[str, ...], ...] = (v0001_first.STATEMENTS,)
"""The statements that lead from version i to version i + 1."""

_MARKS = "CREATE TABLE IF NOT EXISTS schema_version (version INTEGER NOT NULL PRIMARY KEY, applied_at BIGINT NOT NULL)"


def migrate(cursor: DBAPICursor, words: Mapping[str, str], place: Path | str, now: int) -> int:
    """Bring a database to the latest version inside the caller's transaction; returns the version found.

    Raises StoreUnavailable when the database is newer than this program.
    """
    cursor.execute(_MARKS)
    cursor.execute("SELECT version FROM schema_version")
    found = max((row[0] for row in cursor.fetchall()), default=0)
    if found > len(VERSIONS):
        raise StoreUnavailable(
            f"the database {place} has schema version {found}, this server knows up to {len(VERSIONS)}: "
            "start the newer server again, or choose another data folder"
        )
    for version, statements in enumerate(VERSIONS[found:], start=found + 1):
        for statement in statements:
            cursor.execute(Template(statement).substitute(words))
        cursor.execute(f"INSERT INTO schema_version (version, applied_at) VALUES ({version}, {now})")
    return int(found)
