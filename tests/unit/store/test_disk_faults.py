"""A disk that fails: the caller hears where and what to do, and nothing that was accepted is lost."""

from __future__ import annotations

import errno
import hashlib
from collections.abc import Iterator
from pathlib import Path

import pytest
from contract.stores import ANN, Clock, accept_all, begin, claim_one, finish, graph, put, spec, submit
from nearchord_service.model.errors import ContentInvalid, ContentUnknown, FieldViolation, StoreUnavailable
from nearchord_service.store.port import Query
from nearchord_service.store.sql import SqlStore, behind
from nearchord_service.store.sql.disk import Disk

LARGE = graph(1, padding=2 << 20)


class FailingDisk(Disk):
    """Fails where it is told to; a failing write leaves half of its piece, as a full disk does."""

    failing = ""
    flushes = 0

    def _try(self, name: str) -> None:
        if self.failing == name:
            raise OSError(errno.ENOSPC, "no space")

    def open(self, name: str, keep: int) -> int:
        self._try("open")
        return super().open(name, keep)

    def write(self, descriptor: int, piece: bytes) -> None:
        if self.failing == "write":
            super().write(descriptor, piece[: len(piece) // 2])
        self._try("write")
        super().write(descriptor, piece)

    def flush(self, descriptor: int) -> None:
        self.flushes += 1
        self._try("flush")
        super().flush(descriptor)

    def sync(self, descriptor: int) -> None:
        self._try("sync")
        super().sync(descriptor)

    def remove(self, name: str) -> None:
        self._try("remove")
        super().remove(name)


@pytest.fixture
def disk(tmp_path: Path) -> FailingDisk:
    return FailingDisk(tmp_path)


@pytest.fixture
def store(tmp_path: Path, disk: FailingDisk) -> Iterator[SqlStore]:
    opened = SqlStore(tmp_path, clock=Clock(), disk=disk)
    opened.start()
    yield opened
    opened.stop()


def space(place: Path) -> str:
    return rf"{place}: No space left on device; free some space"


def test_upload_goes_on_after_a_full_disk(store: SqlStore, disk: FailingDisk) -> None:
    upload = begin(store, LARGE.data)
    upload.write(LARGE.data[:100])
    disk.failing = "write"
    with pytest.raises(StoreUnavailable, match=space(disk.content)):
        upload.write(LARGE.data[100:])
    assert upload.committed == 100
    disk.failing = ""
    upload.release()
    assert store.upload_state(ANN, LARGE.address) == (100, False)
    upload = begin(store, LARGE.data, offset=100)
    upload.write(LARGE.data[100:])
    upload.publish(accept_all)
    path = store.content_bytes(ANN, LARGE.address).path
    assert path is not None
    assert path.read_bytes() == LARGE.data


@pytest.mark.parametrize("where", ["open", "sync"])
def test_upload_that_cannot_be_kept_is_not_visible(store: SqlStore, disk: FailingDisk, where: str) -> None:
    disk.failing = where
    with pytest.raises(StoreUnavailable, match=space(disk.content)):
        put(store, LARGE.data)
    with pytest.raises(ContentUnknown):
        store.content(ANN, LARGE.address)
    disk.failing = ""
    assert submit(store, spec(LARGE)).graph_address == LARGE.address


def test_failed_publish_can_be_tried_again(store: SqlStore, disk: FailingDisk) -> None:
    upload = begin(store, LARGE.data)
    upload.write(LARGE.data)
    disk.failing = "sync"
    with pytest.raises(StoreUnavailable):
        upload.publish(accept_all)
    disk.failing = ""
    assert upload.publish(accept_all).address == LARGE.address


def test_bytes_lost_on_their_way_to_the_disk_are_not_published(
    store: SqlStore, disk: FailingDisk, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What the disk lost while more arrived is not forgotten when it says yes in the end."""
    monkeypatch.setattr(behind, "STEP", 1 << 20)
    upload = begin(store, LARGE.data)
    disk.failing = "flush"
    upload.write(LARGE.data[: 1 << 20])
    upload.write(LARGE.data[1 << 20 :])
    for _ in range(2):
        with pytest.raises(StoreUnavailable, match=space(disk.content)):
            upload.publish(accept_all)
        disk.failing = ""
    assert disk.flushes == 2
    with pytest.raises(ContentUnknown):
        store.content(ANN, LARGE.address)


@pytest.mark.parametrize("where", ["", "sync"])
def test_refused_bytes_are_dropped_whatever_becomes_of_the_disk(store: SqlStore, disk: FailingDisk, where: str) -> None:
    upload = begin(store, LARGE.data)
    upload.write(LARGE.data)
    disk.failing = where

    def refuse(view: memoryview) -> tuple[int, int]:
        raise ContentInvalid(FieldViolation("piece", f"row 3 of {len(view)} is wrong"))

    with pytest.raises(ContentInvalid, match="row 3"):
        upload.publish(refuse)
    assert store.upload_state(ANN, LARGE.address) == (0, False)
    assert list(disk.content.iterdir()) == []


@pytest.mark.parametrize("where", ["open", "write", "sync"])
def test_submission_whose_content_cannot_be_written_is_not_accepted(
    store: SqlStore, disk: FailingDisk, where: str
) -> None:
    disk.failing = where
    with pytest.raises(StoreUnavailable, match=space(disk.content)):
        submit(store, spec(LARGE))
    disk.failing = ""
    assert store.jobs(ANN, Query()).jobs == ()
    assert list(disk.content.iterdir()) == []


def test_file_that_cannot_be_removed_goes_at_the_next_start(store: SqlStore, disk: FailingDisk) -> None:
    address = put(store, LARGE.data)
    disk.failing = "remove"
    store.delete_content(ANN, address)
    assert len(list(disk.content.iterdir())) == 1
    disk.failing = ""
    store.stop()
    store.start()
    assert list(disk.content.iterdir()) == []


def test_full_database_refuses_and_recovers(store: SqlStore) -> None:
    """SQLite itself runs out of pages, in the middle of operations of any kind."""
    jobs = [submit(store, spec(graph(i))) for i in range(3)]
    lease = claim_one(store)

    def limit(pages: int) -> object:
        return store._write(lambda transaction: transaction.cursor.execute(f"PRAGMA max_page_count = {pages}"))

    limit(1)
    with pytest.raises(StoreUnavailable, match=r"nearchord\.db: database or disk is full; free some space"):
        submit(store, *(spec(graph(i, padding=50_000)) for i in range(9)), batch=True)
    assert [store.job(ANN, job.id).id for job in jobs] == [job.id for job in jobs]
    limit(1 << 30)
    assert finish(store, lease)
    submit(store, *(spec(graph(i, padding=50_000)) for i in range(9)), batch=True)
    assert len(store.jobs(ANN, Query()).jobs) == 12
    assert hashlib.sha256(graph(1).data).hexdigest() == jobs[1].graph_address
