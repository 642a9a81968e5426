"""Core statements, compiled once and run with plain values.

SQLAlchemy says what the SQL of a dialect is; running it costs no more than the driver itself. Rows are what the
driver's row factory makes: values by column name.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Protocol

from sqlalchemy import literal_column
from sqlalchemy.engine.interfaces import DBAPICursor, Dialect
from sqlalchemy.sql.elements import ClauseElement, ColumnClause


class Row(Protocol):
    """One row, values by column name."""

    def __getitem__(self, name: str, /) -> Any:
        """Return the value of a column."""


def word(value: str) -> ColumnClause[str]:
    """Return a string written into the statement: partial indexes are used only where their condition is literal."""
    return literal_column("'" + value.replace("'", "''") + "'")


class Statement:
    """A statement in Core's terms, compiled at first use for each dialect."""

    def __init__(self, clause: ClauseElement) -> None:
        self._clause = clause
        self._compiled: dict[str, tuple[str, dict[str, Any]]] = {}

    def compiled(self, dialect: Dialect) -> tuple[str, dict[str, Any]]:
        """Return the text for a dialect and the values that the clause itself brings."""
        found = self._compiled.get(dialect.name)
        if found is None:
            compiled = self._clause.compile(dialect=dialect)
            own = {name: value for name, value in compiled.params.items() if value is not None}
            found = self._compiled[dialect.name] = (str(compiled), own)
        return found


class Connection:
    """A driver's connection that runs statements."""

    def __init__(self, cursor: DBAPICursor, dialect: Dialect) -> None:
        self.cursor = cursor
        self.dialect = dialect

    def _execute(self, statement: Statement, values: dict[str, Any]) -> None:
        sql, own = statement.compiled(self.dialect)
        self.cursor.execute(sql, {**own, **values} if own else values)

    def one(self, statement: Statement, **values: Any) -> Row | None:
        """Return the first row or None."""
        self._execute(statement, values)
        row: Row | None = self.cursor.fetchone()
        return row

    def all(self, statement: Statement, **values: Any) -> list[Row]:
        """Return all rows."""
        self._execute(statement, values)
        return list(self.cursor.fetchall())

    def run(self, statement: Statement, **values: Any) -> int:
        """Run a statement; returns the rows it touched."""
        self._execute(statement, values)
        return self.cursor.rowcount

    def run_many(self, statement: Statement, rows: Sequence[dict[str, Any]]) -> int:
        """Run a statement for each set of values; returns the rows touched in all."""
        if not rows:
            return 0
        sql, own = statement.compiled(self.dialect)
        self.cursor.executemany(sql, [{**own, **row} for row in rows] if own else rows)
        return self.cursor.rowcount
