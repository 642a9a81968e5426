"""The writer: groups share a commit, and neither their failures nor each other's spread."""

from __future__ import annotations

import datetime as dt
import sqlite3
import threading
from collections.abc import Iterator
from concurrent.futures import Future
from pathlib import Path

import pytest
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.store.port import Change
from nearchord_service.store.sql.engine import SqliteDatabase
from nearchord_service.store.sql.writer import Transaction, Writer

DEADLINE = 60


class Bench:
    """A writer on a database of its own, whose groups are known because its first operation waits."""

    def __init__(self, path: Path) -> None:
        self.database = SqliteDatabase(path)
        self.commits: list[float] = []
        self.changes: list[Change] = []
        self.connection = self.database.open(0)
        self.writer = Writer(self.database, self.connection, self._now, self.commits.append, None, self.changes.append)
        self.writer.start()

    @staticmethod
    def _now() -> dt.datetime:
        return dt.datetime(2030, 1, 1, tzinfo=dt.UTC)

    def as_one_group(self, *operations: object) -> list[Future[object]]:
        entered, leave = threading.Event(), threading.Event()

        def wait(_: Transaction) -> None:
            entered.set()
            assert leave.wait(DEADLINE)

        first = self.writer.enqueue(wait)
        assert entered.wait(DEADLINE)
        futures = [self.writer.enqueue(operation) for operation in operations]  # type: ignore[arg-type]
        leave.set()
        first.result(DEADLINE)
        for future in futures:
            future.exception(DEADLINE)
        return futures

    def owners(self) -> list[str]:
        with self.database.reading() as connection:
            connection.cursor.execute("SELECT owner FROM usage ORDER BY owner")
            return [row["owner"] for row in connection.cursor.fetchall()]


@pytest.fixture
def bench(tmp_path: Path) -> Iterator[Bench]:
    made = Bench(tmp_path / "test.db")
    yield made
    made.writer.stop()
    made.database.close()


def add(owner: str, fault: Exception | None = None) -> object:
    def operation(transaction: Transaction) -> str:
        transaction.cursor.execute("INSERT INTO usage VALUES (?, 0, 0)", (owner,))
        transaction.news.job_ids.add(owner)
        if fault is not None:
            raise fault
        return owner

    return operation


def test_operations_that_wait_share_one_commit(bench: Bench) -> None:
    futures = bench.as_one_group(*(add(str(i)) for i in range(50)))
    assert [future.result() for future in futures] == [str(i) for i in range(50)]
    bench.writer.stop()
    assert len(bench.commits) == 2
    assert [change.job_ids for change in bench.changes] == [frozenset(map(str, range(50)))]


def test_failed_operation_leaves_its_group_alone(bench: Bench) -> None:
    first, bad, last = bench.as_one_group(add("a"), add("b", ValueError("defect")), add("c"))
    assert (first.result(), last.result()) == ("a", "c")
    with pytest.raises(ValueError, match="defect"):
        bad.result()
    assert bench.owners() == ["a", "c"]
    bench.writer.stop()
    assert [change.job_ids for change in bench.changes] == [{"a", "c"}]


def test_failed_operation_gives_its_numbers_back(bench: Bench) -> None:
    def take(transaction: Transaction) -> range:
        return transaction.take_numbers(3)

    def fail(transaction: Transaction) -> None:
        transaction.take_numbers(10)
        raise ValueError

    first, _, last = bench.as_one_group(take, fail, take)
    assert [*first.result(), *last.result()] == [1, 2, 3, 4, 5, 6]  # type: ignore[misc]


def test_defect_in_a_statement_is_no_store_failure(bench: Bench) -> None:
    (first, second) = bench.as_one_group(add("a"), add("a"))
    assert first.result() == "a"
    with pytest.raises(sqlite3.IntegrityError):
        second.result()


def test_lost_transaction_fails_its_whole_group_and_no_other(bench: Bench) -> None:
    """SQLite may end a transaction by itself; what had seemed done in it is not."""

    def lose(transaction: Transaction) -> None:
        transaction.cursor.execute("ROLLBACK")
        raise sqlite3.OperationalError("disk I/O error")

    futures = bench.as_one_group(add("a"), lose, add("c"))
    for future in futures:
        with pytest.raises(StoreUnavailable, match=r"test\.db: disk I/O error; check the file system"):
            future.result()
    assert bench.owners() == []
    assert bench.writer.enqueue(add("d")).result(DEADLINE) == "d"  # type: ignore[arg-type]
    assert bench.owners() == ["d"]


def test_failed_commit_fails_its_whole_group(bench: Bench, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(_: object) -> None:
        raise sqlite3.OperationalError("database or disk is full")

    with monkeypatch.context() as patch:
        patch.setattr(bench.database, "commit", fail)
        futures = [bench.writer.enqueue(add(owner)) for owner in "ab"]  # type: ignore[arg-type]
        for future in futures:
            with pytest.raises(StoreUnavailable, match="free some space"):
                future.result(DEADLINE)
    assert bench.owners() == []
    assert bench.changes == []
    assert bench.writer.enqueue(add("c")).result(DEADLINE) == "c"  # type: ignore[arg-type]


def test_cancelled_operation_is_left_out(bench: Bench) -> None:
    entered, leave = threading.Event(), threading.Event()

    def wait(_: Transaction) -> None:
        entered.set()
        assert leave.wait(DEADLINE)

    bench.writer.enqueue(wait)
    assert entered.wait(DEADLINE)
    withdrawn, kept = (bench.writer.enqueue(add(owner)) for owner in "ab")  # type: ignore[arg-type]
    assert withdrawn.cancel()
    leave.set()
    assert kept.result(DEADLINE) == "b"
    assert bench.owners() == ["b"]


def test_stopped_writer_takes_nothing_more(bench: Bench) -> None:
    kept = bench.writer.enqueue(add("a"))  # type: ignore[arg-type]
    bench.writer.stop()
    bench.writer.stop()
    assert kept.result(timeout=0) == "a"
    with pytest.raises(StoreUnavailable, match="closed"):
        bench.writer.enqueue(add("b"))  # type: ignore[arg-type]
