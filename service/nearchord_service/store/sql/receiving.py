"""One upload while somebody holds it: bytes into the file, the digest along with them, and the step into content.

Bytes arrive in a file of the content folder, under the name that they keep once published. The row in `uploads` makes
the file an upload, the row in `blobs` makes it content; moving from one to the other is one transaction, so that no
crash can lose accepted bytes or show half of them. The committed offset is the length of the file.
"""

from __future__ import annotations

import hashlib
import logging
import mmap
import os
from collections.abc import Callable
from concurrent.futures import Future
from dataclasses import dataclass
from functools import partial

from sqlalchemy import bindparam, delete, update

from nearchord_service.model.content import Content, ContentKind
from nearchord_service.model.errors import (
    ContentInvalid,
    DigestMismatch,
    FieldViolation,
    ServiceError,
    StoreUnavailable,
)
from nearchord_service.store.sql.behind import Behind
from nearchord_service.store.sql.content import (
    ADD_USE,
    INSERT_BLOB,
    INSERT_CONTENT,
    OWNED,
    SMALL_BYTES,
    bytes_at,
    owned,
)
from nearchord_service.store.sql.disk import Disk, disk_trouble
from nearchord_service.store.sql.rows import content_from
from nearchord_service.store.sql.schema import uploads
from nearchord_service.store.sql.statement import Statement
from nearchord_service.store.sql.writer import Operation, Transaction

_log = logging.getLogger(__name__)
_READ_AGAIN = 1 << 20
ONE_UPLOAD = (uploads.c.owner == bindparam("of_owner")) & (uploads.c.address == bindparam("of_address"))
_TOUCH = Statement(update(uploads).where(ONE_UPLOAD).values(touched_at=bindparam("now")))
_END = Statement(delete(uploads).where(ONE_UPLOAD))


@dataclass(frozen=True)
class Announced:
    """What was announced for an upload, and the file that takes it."""

    owner: str
    address: str
    kind: ContentKind
    size_bytes: int
    file: str


def drop_upload(disk: Disk, announced: Announced, transaction: Transaction) -> None:
    """Forget an upload; its file goes after the commit."""
    transaction.run(_END, of_owner=announced.owner, of_address=announced.address)
    transaction.news.afterwards.append(partial(disk.remove, announced.file))


class FileUpload:
    """See `port.Upload`. Going on reads again what is there, for the digest."""

    def __init__(
        self,
        announced: Announced,
        offset: int,
        disk: Disk,
        write: Callable[[Operation[object]], object],
        let_go: Callable[[], None],
    ) -> None:
        """Open the file; `write` runs an operation in the store, `let_go` ends the hold. OSError when it fails."""
        self.committed = offset
        self._announced = announced
        self._disk = disk
        self._write = write
        self._let_go = let_go
        self._digest = hashlib.sha256()
        self._descriptor: int | None = disk.open(announced.file, keep=offset)
        self._behind = Behind(disk, self._descriptor)
        for begin in range(0, offset, _READ_AGAIN):
            self._digest.update(os.pread(self._descriptor, min(_READ_AGAIN, offset - begin), begin))

    def write(self, piece: bytes | memoryview) -> None:
        """Append a piece."""
        descriptor = self._held()
        size = self._announced.size_bytes
        if self.committed + len(piece) > size:
            self._drop()
            raise _invalid(f"more bytes than the {size} announced")
        try:
            self._disk.write(descriptor, piece)
        except OSError as fault:
            self._cut(descriptor)
            raise disk_trouble(self._disk.content, fault) from fault
        self._behind.wrote(len(piece))
        self._digest.update(piece)
        self.committed += len(piece)

    def _cut(self, descriptor: int) -> None:
        """Take back what a failed write has left, so that the file ends where the digest does."""
        os.ftruncate(descriptor, self.committed)
        os.lseek(descriptor, self.committed, os.SEEK_SET)

    def publish(self, check: Callable[[memoryview], tuple[int, int]]) -> Content:
        """Turn the upload into content; the disk is kept busy while the bytes are checked."""
        descriptor = self._held()
        try:
            self._check_bytes()
            synced = None if self._small else self._behind.sync()
            vertices, edges = check(self._view(descriptor))
        except ServiceError:
            self._drop()
            raise
        data = self._keep(descriptor, synced)
        content = self._write(lambda transaction: self._turn(transaction, data, vertices, edges))
        assert isinstance(content, Content)
        self._close()
        return content

    def _check_bytes(self) -> None:
        announced = self._announced
        if self.committed != announced.size_bytes:
            what = f"the upload ended after {self.committed} of the {announced.size_bytes} bytes announced"
            raise _invalid(what)
        computed = self._digest.hexdigest()
        if computed != announced.address:
            raise DigestMismatch(announced.address, computed)

    def _view(self, descriptor: int) -> memoryview:
        """Return all bytes, read-only. Nobody closes the map: arrays over it may live on in a traceback."""
        size = self._announced.size_bytes
        return memoryview(mmap.mmap(descriptor, size, prot=mmap.PROT_READ)) if size else memoryview(b"")

    @property
    def _small(self) -> bool:
        return self._announced.size_bytes < SMALL_BYTES

    def _keep(self, descriptor: int, synced: Future[None] | None) -> bytes | None:
        """Wait until the file is durable, or return the bytes that go into the database because they are few."""
        try:
            if synced is None:
                return os.pread(descriptor, SMALL_BYTES, 0)
            synced.result()
        except OSError as fault:
            raise disk_trouble(self._disk.content, fault) from fault
        return None

    def _turn(self, transaction: Transaction, data: bytes | None, vertices: int, edges: int) -> Content:
        """Turn the upload into content, unless a submission has brought the same content meanwhile."""
        announced = self._announced
        owner, address, size = announced.owner, announced.address, announced.size_bytes
        transaction.run(_END, of_owner=owner, of_address=address)
        if transaction.one(OWNED, owner=owner, address=address) is None:
            transaction.run(
                INSERT_CONTENT,
                owner=owner,
                address=address,
                kind=announced.kind,
                size_bytes=size,
                vertices=vertices,
                edges=edges,
                created_at=transaction.now,
                used_at=transaction.now,
            )
            transaction.run(ADD_USE, owner=owner, jobs=0, bytes=size)
            file = announced.file if data is None else None
            transaction.run(INSERT_BLOB, address=address, size_bytes=size, data=data, file=file)
        if bytes_at(transaction, self._disk, address).path != self._disk.path(announced.file):
            transaction.news.afterwards.append(partial(self._disk.remove, announced.file))
        return content_from(owned(transaction, owner, address))

    def release(self) -> None:
        """Let go and keep the bytes; an upload without any is dropped."""
        if self._descriptor is None:
            return
        if not self.committed:
            self._drop()
            return
        names = {"of_owner": self._announced.owner, "of_address": self._announced.address}
        try:
            self._behind.sync().result()
            self._write(lambda transaction: transaction.run(_TOUCH, **names, now=transaction.now))
        except (OSError, StoreUnavailable) as fault:
            _log.warning("upload %s was let go, but when could not be noted: %s", self._announced.address, fault)
        self._close()

    def _held(self) -> int:
        if self._descriptor is None:
            raise ValueError("this upload was let go; begin it again")
        return self._descriptor

    def _drop(self) -> None:
        try:
            self._write(partial(drop_upload, self._disk, self._announced))
        except StoreUnavailable as fault:
            _log.warning("upload %s stays until it is stale: %s", self._announced.address, fault)
        self._close()

    def _close(self) -> None:
        if self._descriptor is not None:
            self._behind.close()
            os.close(self._descriptor)
            self._descriptor = None
            self._let_go()


def _invalid(what: str) -> ContentInvalid:
    return ContentInvalid(FieldViolation("piece", f"{what}; nothing was stored: upload again from offset 0"))
