"""SQLite: versions, pragmas, one connection that writes and a pool of connections that cannot.

Another database is another class with these methods; nothing else in this package knows SQLite.
"""

from __future__ import annotations

import logging
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import URL, bindparam, create_engine, event, update
from sqlalchemy.dialects import sqlite
from sqlalchemy.engine import Engine
from sqlalchemy.engine.interfaces import Dialect
from sqlalchemy.exc import TimeoutError as PoolTimeoutError
from sqlalchemy.pool import NullPool, PoolProxiedConnection, QueuePool

from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.store.sql.migrations import migrate
from nearchord_service.store.sql.schema import counters
from nearchord_service.store.sql.statement import Connection, Statement, word

_log = logging.getLogger(__name__)
_OLDEST = (3, 35, 0)
"""The first with RETURNING."""

_COMMON = ("PRAGMA busy_timeout = 5000", "PRAGMA temp_store = MEMORY")
_WRITING = (
    "PRAGMA auto_vacuum = INCREMENTAL",  # only a database without tables takes this in
    "PRAGMA journal_mode = WAL",
    "PRAGMA synchronous = FULL",
    "PRAGMA wal_autocheckpoint = 4000",
    "PRAGMA journal_size_limit = 67108864",
    "PRAGMA cache_size = -131072",  # KiB; the pages that a batch of 100,000 jobs touches, few of them in order
)
_READING = ("PRAGMA query_only = ON", "PRAGMA cache_size = -4096")
_WORDS = {"key": "INTEGER", "bytes": "BLOB", "clustered": "WITHOUT ROWID"}


_NUMBERS_AT_RISK = 1_000_000
_SKIP_NUMBERS = Statement(
    update(counters).where(counters.c.name == word("event")).values(value=counters.c.value + bindparam("count"))
)
"""At each later opening the counter leaps: a number that a power failure took back may be some watcher's cursor."""


class SqliteDatabase:
    """The database file of a data folder."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self.dialect: Dialect = sqlite.dialect(paramstyle="named")
        self._writing: Engine | None = None
        self._reading: Engine | None = None
        self._link: PoolProxiedConnection | None = None
        self._lasting = True

    def open(self, now: int) -> Connection:
        """Open, migrate and return the writing connection. Raises StoreUnavailable."""
        _log.info("SQLite %s, database %s", sqlite3.sqlite_version, self.path)
        if sqlite3.sqlite_version_info < _OLDEST:
            raise StoreUnavailable(
                f"SQLite {sqlite3.sqlite_version} is too old: use a Python with SQLite "
                + ".".join(map(str, _OLDEST))
                + " or later"
            )
        try:
            return self._open(now)
        except sqlite3.Error as fault:
            self.close()
            raise self.trouble(fault) from fault
        except StoreUnavailable:
            self.close()
            raise

    def _open(self, now: int) -> Connection:
        self._writing = self._engine(_WRITING, NullPool)
        self._reading = self._engine(_READING, QueuePool, pool_size=16, max_overflow=48)
        self._link = self._writing.raw_connection()
        connection = Connection(self._link.cursor(), self.dialect)
        self._lasting = True
        self.begin(connection, lasting=True)
        try:
            if migrate(connection.cursor, _WORDS, self.path, now):
                connection.run(_SKIP_NUMBERS, count=_NUMBERS_AT_RISK)
            self.commit(connection)
        finally:
            self.rollback(connection)
        return connection

    def _engine(self, pragmas: tuple[str, ...], pool: type[Any], **options: Any) -> Engine:
        engine = create_engine(
            URL.create("sqlite", database=str(self.path)),
            isolation_level="AUTOCOMMIT",
            poolclass=pool,
            connect_args={"check_same_thread": False, "cached_statements": 256},
            **options,
        )

        @event.listens_for(engine, "connect")
        def prepare(connection: sqlite3.Connection, _: object) -> None:
            connection.isolation_level = None
            connection.row_factory = sqlite3.Row
            for pragma in _COMMON + pragmas:
                connection.execute(pragma)

        return engine

    def close(self) -> None:
        """Close everything, the readers first so that the writing connection makes the last checkpoint."""
        if self._reading is not None:
            self._reading.dispose()
        if self._link is not None:
            self._link.close()
        if self._writing is not None:
            self._writing.dispose()
        self._reading = self._writing = self._link = None

    @contextmanager
    def reading(self) -> Iterator[Connection]:
        """Lend a connection that sees one state of the database until it is given back."""
        if self._reading is None:
            raise StoreUnavailable("the store is closed; start the server again")
        try:
            link = self._reading.raw_connection()
        except PoolTimeoutError as fault:
            raise StoreUnavailable(f"{self.path}: too many reads at once; try again in a moment") from fault
        except sqlite3.Error as fault:
            raise self.trouble(fault) from fault
        try:
            try:
                connection = Connection(link.cursor(), self.dialect)
                connection.cursor.execute("BEGIN")
                yield connection
            finally:
                link.close()
        except (sqlite3.OperationalError, sqlite3.DatabaseError) as fault:
            if not self.failed(fault):
                raise
            raise self.trouble(fault) from fault

    def begin(self, connection: Connection, *, lasting: bool) -> None:
        """Begin a transaction that may write. One that is not lasting survives the process, not a power failure."""
        if lasting is not self._lasting:
            connection.cursor.execute(f"PRAGMA synchronous = {'FULL' if lasting else 'NORMAL'}")
            self._lasting = lasting
        connection.cursor.execute("BEGIN IMMEDIATE")

    def commit(self, connection: Connection) -> None:
        """Make the transaction durable."""
        connection.cursor.execute("COMMIT")

    def rollback(self, connection: Connection) -> None:
        """Undo the transaction if one is open."""
        if self.in_transaction(connection):
            connection.cursor.execute("ROLLBACK")

    def in_transaction(self, connection: Connection) -> bool:
        """Say whether a transaction is open: SQLite ends it by itself on some errors."""
        link: sqlite3.Connection = connection.cursor.connection
        return link.in_transaction

    def shrink(self, connection: Connection) -> None:
        """Give free pages at the end of the file back to the file system, a bounded number at a time."""
        connection.cursor.execute("PRAGMA incremental_vacuum(4096)")
        connection.cursor.fetchall()

    @staticmethod
    def failed(fault: Exception) -> bool:
        """Say whether the database failed, rather than the program that used it."""
        return isinstance(fault, sqlite3.OperationalError) or type(fault) is sqlite3.DatabaseError

    def trouble(self, fault: Exception) -> StoreUnavailable:
        """Return the error for a failure of the database, with its place and remedy."""
        text = str(fault)
        if "full" in text:
            remedy = "free some space on that file system, then try again"
        elif "locked" in text or "busy" in text:
            remedy = "another program holds the database: end it, then try again"
        elif "malformed" in text or "not a database" in text:
            remedy = "the file is damaged: stop the server and restore the data folder from a backup"
        elif "readonly" in text or "unable to open" in text:
            remedy = "give the server's user read and write access to the data folder"
        else:
            remedy = "check the file system that holds the data folder, then try again"
        return StoreUnavailable(f"{self.path}: {text}; {remedy}")
