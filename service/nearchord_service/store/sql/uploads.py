"""Uploads: who holds which, where they go on, and dropping those that nobody continues."""

from __future__ import annotations

import threading
from functools import partial
from pathlib import Path
from typing import Any

from sqlalchemy import bindparam, select, text

from nearchord_service.model.content import Content, ContentKind
from nearchord_service.model.errors import FieldInvalid, FieldViolation, UploadBusy, UploadOffset
from nearchord_service.store.port import Limits, Upload
from nearchord_service.store.sql.content import OWNED, TOUCH, USED, Contents, check_content_quota
from nearchord_service.store.sql.disk import disk_trouble, new_file_name
from nearchord_service.store.sql.receiving import ONE_UPLOAD, Announced, FileUpload, drop_upload
from nearchord_service.store.sql.rows import content_from
from nearchord_service.store.sql.schema import uploads
from nearchord_service.store.sql.statement import Row, Statement
from nearchord_service.store.sql.writer import Transaction

_UNDER_WAY = Statement(select(uploads).where(ONE_UPLOAD))
_BEGIN = Statement(
    text(
        "INSERT INTO uploads (owner, address, kind, size_bytes, file, touched_at)"
        " VALUES (:owner, :address, :kind, :size_bytes, :file, :touched_at)"
        " ON CONFLICT (owner, address) DO UPDATE SET kind = excluded.kind, size_bytes = excluded.size_bytes,"
        " touched_at = excluded.touched_at"
    )
)
_STALE = Statement(select(uploads).where(uploads.c.touched_at < bindparam("before")))
_STILL_STALE = Statement(select(uploads).where(ONE_UPLOAD, uploads.c.touched_at < bindparam("before")))


class Uploads(Contents):
    """The uploading side of `port.ContentStore`."""

    def __init__(self, data: Path, **options: Any) -> None:
        """See `Core`."""
        super().__init__(data, **options)
        self._holds: set[tuple[str, str]] = set()
        self._holding = threading.Lock()

    def upload_state(self, owner: str, address: str) -> tuple[int, bool]:
        """Return (committed bytes of an upload under way, whether the content is stored)."""
        with self._reading() as connection:
            stored = connection.one(OWNED, owner=owner, address=address) is not None
            row = connection.one(_UNDER_WAY, of_owner=owner, of_address=address)
        return self._committed(row), stored

    def _committed(self, row: Row | None) -> int:
        return 0 if row is None else min(self._disk.size(row["file"]), int(row["size_bytes"]))

    def begin_upload(
        self, owner: str, address: str, kind: ContentKind, size_bytes: int, offset: int, limits: Limits
    ) -> Upload | Content:
        """Take hold of an upload. Offset 0 begins anew, whatever is there already."""
        announced = Announced(owner, address, kind, size_bytes, new_file_name(address))
        stored = self._stored(announced)
        if stored is not None:
            return stored
        if not self._take(announced):
            raise UploadBusy(address)
        try:
            begun = self._write(lambda transaction: self._begin(transaction, announced, offset, limits))
            return FileUpload(begun, offset, self._disk, self._write, partial(self._let_go, announced))
        except OSError as fault:
            self._let_go(announced)
            raise disk_trouble(self._disk.content, fault) from fault
        except BaseException:
            self._let_go(announced)
            raise

    def _stored(self, announced: Announced) -> Content | None:
        """Return content that is there already, noting that it is wanted."""
        of = {"owner": announced.owner, "address": announced.address}
        with self._reading() as connection:
            if connection.one(OWNED, **of) is None:
                return None

        def operation(transaction: Transaction) -> Content | None:
            row = transaction.one(OWNED, **of)
            if row is None:
                return None
            _same(row, announced, "stored")
            transaction.run(TOUCH, whose=announced.owner, which=announced.address, now=transaction.now)
            return content_from(row)

        return self._write(operation)

    def _begin(self, transaction: Transaction, announced: Announced, offset: int, limits: Limits) -> Announced:
        """Check and note the beginning; returns what was announced, with the file it goes on in."""
        owner, address = announced.owner, announced.address
        under_way = transaction.one(_UNDER_WAY, of_owner=owner, of_address=address)
        committed = self._committed(under_way)
        if offset not in (0, committed):
            raise UploadOffset(address, offset, committed)
        if under_way is not None and offset:
            _same(under_way, announced, "under way")
        used = transaction.all(USED, owner=owner, besides=address)[0]["bytes"]
        check_content_quota(used, announced.size_bytes, limits)
        file = announced.file if under_way is None else under_way["file"]
        begun = Announced(owner, address, announced.kind, announced.size_bytes, file)
        transaction.run(
            _BEGIN,
            owner=owner,
            address=address,
            kind=begun.kind,
            size_bytes=begun.size_bytes,
            file=file,
            touched_at=transaction.now,
        )
        return begun

    def _take(self, announced: Announced) -> bool:
        with self._holding:
            held = (announced.owner, announced.address) in self._holds
            self._holds.add((announced.owner, announced.address))
            return not held

    def _let_go(self, announced: Announced) -> None:
        with self._holding:
            self._holds.discard((announced.owner, announced.address))

    def _drop_stale_uploads(self, before: int) -> int:
        """Drop uploads that nobody holds and nobody has continued since a time; returns how many."""
        with self._reading() as connection:
            stale = connection.all(_STALE, before=before)
        dropped = 0
        for row in stale:
            announced = Announced(row["owner"], row["address"], row["kind"], row["size_bytes"], row["file"])
            if self._take(announced):
                try:
                    dropped += self._write(partial(self._drop_if_stale, announced, before))
                finally:
                    self._let_go(announced)
        return dropped

    def _drop_if_stale(self, announced: Announced, before: int, transaction: Transaction) -> int:
        of = {"of_owner": announced.owner, "of_address": announced.address}
        row = transaction.one(_STILL_STALE, **of, before=before)
        if row is None or row["file"] != announced.file:
            return 0
        drop_upload(self._disk, announced, transaction)
        return 1


def _same(row: Row, announced: Announced, state: str) -> None:
    wrong = []
    if row["kind"] != announced.kind:
        wrong.append(FieldViolation("opening.kind", f"this address is {state} as {row['kind']}; announce that"))
    if row["size_bytes"] != announced.size_bytes:
        length = f"this address is {state} with {row['size_bytes']} bytes; announce that length"
        wrong.append(FieldViolation("opening.size_bytes", length))
    if wrong:
        raise FieldInvalid(*wrong)
