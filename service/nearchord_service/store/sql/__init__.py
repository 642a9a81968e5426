"""The store on SQL: one module a responsibility, `store.SqlStore` puts them together."""

from nearchord_service.store.sql.store import SqlStore

__all__ = ["SqlStore"]
