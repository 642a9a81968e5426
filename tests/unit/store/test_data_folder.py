"""The data folder: one server, the right pragmas, nothing left over."""

from __future__ import annotations

import logging
import os
import sqlite3
import threading
from pathlib import Path

import pytest
from contract.stores import ANN, LIMITS, Clock, begin, claim_one, finish, give_back, graph, put, spec, submit
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.question import QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.store.port import LOST_WORKERS_ALLOWED
from nearchord_service.store.sql import SqlStore
from nearchord_service.store.sql.statement import Connection


@pytest.fixture
def store(tmp_path: Path) -> SqlStore:
    opened = SqlStore(tmp_path / "data", clock=Clock())
    opened.start()
    yield opened  # type: ignore[misc]
    opened.stop()


def test_stop_before_start_is_harmless(tmp_path: Path) -> None:
    SqlStore(tmp_path / "data").stop()
    assert not (tmp_path / "data").exists()


def test_second_server_is_refused_with_folder_and_remedy(store: SqlStore, tmp_path: Path) -> None:
    second = SqlStore(tmp_path / "data")
    with pytest.raises(StoreUnavailable) as caught:
        second.start()
    for part in (str(tmp_path / "data"), f"process {os.getpid()}", "stop that server", "another data folder"):
        assert part in str(caught.value)
    second.stop()
    with pytest.raises(StoreUnavailable):
        second.start()
    store.stop()
    second.start()
    second.stop()


def test_only_the_owner_of_the_folder_may_enter(store: SqlStore, tmp_path: Path) -> None:
    assert (tmp_path / "data" / "content").stat().st_mode & 0o077 == 0


def test_folder_that_cannot_be_made_is_named(tmp_path: Path) -> None:
    (tmp_path / "file").write_bytes(b"")
    with pytest.raises(StoreUnavailable, match="file/data"):
        SqlStore(tmp_path / "file" / "data").start()


def test_files_that_nothing_names_are_removed_at_start(store: SqlStore, tmp_path: Path) -> None:
    """A crash between a file and its row leaves such files; content and broken uploads stay."""
    large, broken = graph(1, padding=1 << 20).data, graph(2, padding=1 << 20).data
    put(store, large)
    upload = begin(store, broken)
    upload.write(broken[:9])
    upload.release()
    folder = tmp_path / "data" / "content"
    kept = set(folder.iterdir())
    (folder / ("0" * 64 + "-01234567")).write_bytes(b"left over")
    store.stop()
    store.start()
    assert set(folder.iterdir()) == kept
    assert len(kept) == 2


def test_files_go_with_their_content(store: SqlStore, tmp_path: Path) -> None:
    folder = tmp_path / "data" / "content"
    first = put(store, graph(1, padding=1 << 20).data)
    put(store, graph(1, padding=1 << 20).data, owner="ben")
    assert len(list(folder.iterdir())) == 1
    store.delete_content(ANN, first)
    assert len(list(folder.iterdir())) == 1
    store.delete_content("ben", first)
    put(store, graph(2).data)
    begin(store, graph(3).data).release()
    assert list(folder.iterdir()) == []


def test_repeated_large_inline_content_leaves_one_file(store: SqlStore, tmp_path: Path) -> None:
    large = graph(1, padding=1 << 20)
    for owner in (ANN, ANN, "ben"):
        submit(store, spec(large), owner=owner)
    assert len(list((tmp_path / "data" / "content").iterdir())) == 1
    request = [spec("0" * 64), spec(graph(2, padding=1 << 20))]
    with pytest.raises(Exception, match="0" * 64):
        submit(store, *request, batch=True)
    assert len(list((tmp_path / "data" / "content").iterdir())) == 1


def test_writer_syncs_every_commit_and_readers_cannot_write(store: SqlStore) -> None:
    def pragmas(connection: object) -> list[object]:
        found = []
        for name in ("synchronous", "journal_mode", "query_only"):
            connection.cursor.execute(f"PRAGMA {name}")  # type: ignore[attr-defined]
            found.append(connection.cursor.fetchone()[0])  # type: ignore[attr-defined]
        return found

    assert store._write(pragmas) == [2, "wal", 0]
    with store._reading() as connection:
        assert pragmas(connection)[1:] == ["wal", 1]
        with pytest.raises(sqlite3.OperationalError, match="readonly"):
            connection.cursor.execute("DELETE FROM jobs")


def test_only_what_must_last_waits_for_the_disk(store: SqlStore) -> None:
    """One lasting operation makes its whole group last."""

    def level(transaction: Connection) -> int:
        transaction.cursor.execute("PRAGMA synchronous")
        return int(transaction.cursor.fetchone()[0])  # type: ignore[index]

    assert [store._write(level, lasting=lasting) for lasting in (False, True, False, True)] == [1, 2, 1, 2]
    entered, leave = threading.Event(), threading.Event()

    def wait(_: Connection) -> None:
        entered.set()
        assert leave.wait(60)

    store._enqueue(wait)
    assert entered.wait(60)
    group = [store._enqueue(level, lasting=lasting) for lasting in (False, True, False)]
    leave.set()
    assert [future.result(60) for future in group] == [2, 2, 2]


def test_numbers_that_a_power_failure_may_take_back_are_not_given_again(store: SqlStore) -> None:
    last = submit(store).sequence
    store.stop()
    store.start()
    assert submit(store).sequence > last + 100_000


def test_sqlite_version_is_logged(tmp_path: Path, caplog: pytest.LogCaptureFixture) -> None:
    with caplog.at_level(logging.INFO):
        opened = SqlStore(tmp_path / "data")
        opened.start()
        opened.stop()
    assert f"SQLite {sqlite3.sqlite_version}" in caplog.text


def test_seconds_of_each_transaction_are_reported(tmp_path: Path) -> None:
    seconds: list[float] = []
    opened = SqlStore(tmp_path / "data", on_write=seconds.append)
    opened.start()
    submit(opened)
    opened.stop()
    assert len(seconds) == 1
    assert seconds[0] > 0


def test_counter_that_fails_harms_no_write(tmp_path: Path) -> None:
    def fail(_: float) -> None:
        raise RuntimeError("counter")

    opened = SqlStore(tmp_path / "data", on_write=fail)
    opened.start()
    job = submit(opened)
    assert opened.job(ANN, job.id) == job
    opened.stop()


def test_every_end_of_a_job_is_reported_once(tmp_path: Path) -> None:
    ends: list[tuple[QuestionName, Verdict]] = []
    opened = SqlStore(tmp_path / "data", clock=Clock(), on_end=lambda *end: ends.append(end))
    opened.start()
    withdrawn, _, _ = submit(opened), submit(opened), submit(opened)
    opened.cancel_job(ANN, withdrawn.id)
    opened.cancel_job(ANN, withdrawn.id)
    lease = claim_one(opened)
    assert (finish(opened, lease), finish(opened, lease)) == (True, False)
    for _ in range(LOST_WORKERS_ALLOWED):
        give_back(opened, claim_one(opened))
    opened.stop()
    assert ends == [(QuestionName.INDEPENDENT_SET, end) for end in (Verdict.CANCELLED, Verdict.PROVEN, Verdict.BROKEN)]


def test_quota_tallies_equal_a_recount(store: SqlStore) -> None:
    """After submitting, finishing, cancelling, uploading and deleting, the kept sums are the true ones."""
    jobs = [submit(store, spec(graph(i))) for i in range(6)]
    put(store, graph(7, padding=1 << 20).data)
    for lease in store.claim("host", 2, 45):
        store.give_back(lease.job.id, lease.attempt, "lost", worker_lost=True).result()
    store.cancel_job(ANN, jobs[0].id)
    store.cancel_job(ANN, jobs[1].id)
    store.delete_job(ANN, jobs[0].id)
    store.delete_content(ANN, graph(0).address)
    with store._reading() as connection:
        execute = connection.cursor.execute
        execute("SELECT unfinished_jobs, content_bytes FROM usage")
        kept = tuple(connection.cursor.fetchone())
        execute(
            "SELECT (SELECT count(*) FROM jobs WHERE finished_at IS NULL), (SELECT sum(size_bytes) FROM contents),"
            " (SELECT sum(size_bytes) FROM blobs)"
        )
        jobs_left, owned_bytes, blob_bytes = connection.cursor.fetchone()
    assert kept == (jobs_left, owned_bytes) == (4, blob_bytes)
    assert LIMITS.unfinished_jobs > 4
