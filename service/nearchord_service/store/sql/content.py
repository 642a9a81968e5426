"""Content per owner: descriptions, bytes, forgetting. Bytes are kept once, in a row when small and in a file when not.

A blob row and its file come and go in this order: file, row; row gone, file gone. A crash in between leaves a file that
no row names, which the next start removes; never a row without its bytes.
"""

from __future__ import annotations

import logging
from functools import partial

from sqlalchemy import bindparam, delete, insert, select, text, update

from nearchord_service.model.content import Bytes, Content
from nearchord_service.model.errors import ContentInUse, ContentUnknown, QuotaExceeded
from nearchord_service.store.port import Limits
from nearchord_service.store.sql.core import Core
from nearchord_service.store.sql.disk import Disk
from nearchord_service.store.sql.rows import content_from
from nearchord_service.store.sql.schema import blobs, contents
from nearchord_service.store.sql.statement import Connection, Row, Statement
from nearchord_service.store.sql.writer import Transaction

SMALL_BYTES = 1 << 20
"""Content shorter than this is kept in the database."""

_log = logging.getLogger(__name__)

OWNED = Statement(
    select(contents).where(contents.c.owner == bindparam("owner"), contents.c.address == bindparam("address"))
)
INSERT_CONTENT = Statement(insert(contents))
INSERT_BLOB = Statement(
    text(
        "INSERT INTO blobs (address, size_bytes, data, file) VALUES (:address, :size_bytes, :data, :file)"
        " ON CONFLICT (address) DO NOTHING"
    )
)
TOUCH = Statement(
    update(contents)
    .where(contents.c.owner == bindparam("whose"), contents.c.address == bindparam("which"))
    .values(used_at=bindparam("now"))
)
ADD_USE = Statement(
    text(
        "INSERT INTO usage (owner, unfinished_jobs, content_bytes) VALUES (:owner, :jobs, :bytes)"
        " ON CONFLICT (owner) DO UPDATE SET unfinished_jobs = usage.unfinished_jobs + excluded.unfinished_jobs,"
        " content_bytes = usage.content_bytes + excluded.content_bytes"
    )
)
USED = Statement(
    text(
        "SELECT coalesce((SELECT unfinished_jobs FROM usage WHERE owner = :owner), 0) AS jobs,"
        " coalesce((SELECT content_bytes FROM usage WHERE owner = :owner), 0)"
        " + coalesce((SELECT sum(size_bytes) FROM uploads WHERE owner = :owner AND address <> :besides), 0) AS bytes"
    )
)
"""Unfinished jobs of an owner, and bytes stored or announced by uploads other than `besides`."""

_BLOB = Statement(select(blobs.c.data, blobs.c.file).where(blobs.c.address == bindparam("address")))
_FILES = Statement(text("SELECT file FROM blobs WHERE file IS NOT NULL UNION ALL SELECT file FROM uploads"))
_SHARED = Statement(select(contents.c.owner).where(contents.c.address == bindparam("address")))
_DROP_BLOB = Statement(delete(blobs).where(blobs.c.address == bindparam("address")))
_FORGET = Statement(
    text(
        "DELETE FROM contents WHERE owner = :owner AND address = :address"
        " AND NOT EXISTS (SELECT 1 FROM jobs WHERE finished_at IS NULL AND graph_address = :address"
        " AND owner = :owner)"
        " AND NOT EXISTS (SELECT 1 FROM jobs WHERE finished_at IS NULL AND weights_address IS NOT NULL"
        " AND weights_address = :address AND owner = :owner)"
        " AND NOT EXISTS (SELECT 1 FROM jobs WHERE finished_at IS NULL AND names_address IS NOT NULL"
        " AND names_address = :address AND owner = :owner)"
    )
)


def bytes_at(connection: Connection, disk: Disk, address: str) -> Bytes:
    """Return where the bytes of an address are."""
    row = connection.one(_BLOB, address=address)
    if row is None:
        raise ContentUnknown(address)
    return Bytes(row["data"], None if row["file"] is None else disk.path(row["file"]))


def forget(transaction: Transaction, disk: Disk, row: Row) -> int | None:
    """Take content from its owner, and the bytes away with the last one.

    Returns how many bytes are freed by that, None when an unfinished job needs the content.
    """
    owner, address = row["owner"], row["address"]
    if not transaction.run(_FORGET, owner=owner, address=address):
        return None
    transaction.run(ADD_USE, owner=owner, jobs=0, bytes=-row["size_bytes"])
    if transaction.one(_SHARED, address=address) is not None:
        return 0
    path = bytes_at(transaction, disk, address).path
    transaction.run(_DROP_BLOB, address=address)
    if path is not None:
        transaction.news.afterwards.append(partial(disk.remove, path.name))
    return int(row["size_bytes"])


def check_content_quota(used: int, more: int, limits: Limits) -> None:
    """Raise QuotaExceeded when an owner's content would grow beyond its limit."""
    if used + more > limits.content_bytes:
        raise QuotaExceeded(
            "stored content",
            f"{more} bytes more than the {used} stored or under way exceed the limit of {limits.content_bytes}; "
            "delete content that is no longer needed",
            None,
        )


class Contents(Core):
    """See `port.ContentStore`; uploads are in `uploads`."""

    def _opened(self) -> None:
        """Remove files that no row names: what a crash between file and row has left."""
        super()._opened()
        with self._reading() as connection:
            named = {row["file"] for row in connection.all(_FILES)}
        for path in self._disk.content.iterdir():
            if path.name not in named:
                _log.info("removing %s, which nothing refers to", path)
                self._disk.remove(path.name)

    def content(self, owner: str, address: str) -> Content:
        """Return a description."""
        with self._reading() as connection:
            return content_from(owned(connection, owner, address))

    def content_bytes(self, owner: str, address: str) -> Bytes:
        """Return where the bytes are."""
        with self._reading() as connection:
            owned(connection, owner, address)
            return bytes_at(connection, self._disk, address)

    def delete_content(self, owner: str, address: str) -> None:
        """Forget content."""

        def operation(transaction: Transaction) -> None:
            row = owned(transaction, owner, address)
            if forget(transaction, self._disk, row) is None:
                raise ContentInUse(address)

        self._write(operation)


def owned(connection: Connection, owner: str, address: str) -> Row:
    """Return the row of content that an owner has stored; raises ContentUnknown."""
    row = connection.one(OWNED, owner=owner, address=address)
    if row is None:
        raise ContentUnknown(address)
    return row
