"""Schema versions: a fresh database is what the tables say, a newer or damaged one is refused."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import pytest
from contract.stores import ANN, claim_one, finish, submit
from nearchord_service.model.answer import Answer, Column, ElementType, ProofKind
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.event import Phase
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.model.stage import Verdict
from nearchord_service.store.sql import SqlStore, migrations
from nearchord_service.store.sql.schema import metadata
from sqlalchemy import Engine, create_engine, inspect


@pytest.fixture
def path(tmp_path: Path) -> Path:
    store = SqlStore(tmp_path)
    store.start()
    store.stop()
    return tmp_path / "nearchord.db"


def shape(engine: Engine) -> dict[str, object]:
    """Return columns and keys of each table, and each index as it was written."""
    found = inspect(engine)
    tables: dict[str, object] = {}
    for table in found.get_table_names():
        columns = {c["name"]: (str(c["type"]), c["nullable"]) for c in found.get_columns(table)}
        tables[table] = columns, found.get_pk_constraint(table)["constrained_columns"]
    with engine.connect() as connection:
        indexes = connection.exec_driver_sql("SELECT name, sql FROM sqlite_master WHERE type = 'index' AND sql <> ''")
        tables["indexes"] = {name: " ".join(sql.split()) for name, sql in indexes}
    engine.dispose()
    return tables


def test_migrations_lead_to_the_tables(path: Path, tmp_path: Path) -> None:
    """What the migrations make and what the statements are built from are the same."""
    stated = create_engine(f"sqlite:///{tmp_path / 'stated.db'}")
    metadata.create_all(stated)
    migrated = shape(create_engine(f"sqlite:///{path}"))
    assert migrated.pop("schema_version")
    assert migrated == shape(stated)


def test_opening_again_applies_nothing(path: Path) -> None:
    store = SqlStore(path.parent)
    store.start()
    submit(store)
    store.stop()
    with sqlite3.connect(path) as connection:
        assert connection.execute("SELECT version FROM schema_version").fetchall() == [(1,)]
    connection.close()


FIRST_FIGURES = (
    '{"format":1,"verdict":"PROVEN","reason":"value and bound meet","value":[7,2],"bound":[7,2],"fill":4,'
    '"fill_lower_bound":3,"states":12,"bags":7,"largest_bag":3,"parts":2,"fill_cores":1,"proof":"search",'
    '"proof_kinds":["search"],"solver_version":"0.1.0","proof_format":0,"phase_seconds":[["read",0.25]],'
    '"seconds":0.25,"peak_memory_bytes":9,"columns":[["chosen","uint32",4]]}'
)
"""Figures as they were written before answers had classes and structure."""


def test_answers_recorded_before_there_were_classes_stay_readable(path: Path) -> None:
    store = SqlStore(path.parent)
    store.start()
    job = submit(store)
    finish(store, claim_one(store))
    store.stop()
    with sqlite3.connect(path) as connection:
        columns = b"\x02\0\0\0"
        connection.execute("UPDATE answers SET figures = ?, columns = ?", (FIRST_FIGURES, columns))
    connection.close()
    store = SqlStore(path.parent)
    store.start()
    assert store.answer(ANN, job.id)[1] == Answer(
        Verdict.PROVEN,
        "value and bound meet",
        value=(7, 2),
        bound=(7, 2),
        fill=4,
        fill_lower_bound=3,
        states=12,
        bags=7,
        largest_bag=3,
        parts=2,
        fill_cores=1,
        proof=ProofKind.SEARCH,
        proof_kinds=(ProofKind.SEARCH,),
        solver_version="0.1.0",
        phase_seconds=((Phase.READ, 0.25),),
        seconds=0.25,
        peak_memory_bytes=9,
        columns=(Column("chosen", ElementType.UINT32, columns),),
    )
    store.stop()


FIRST_TERMS = (
    '{"question":{"name":"colourable-subgraph","must":[1],"never":[],"colours":3},"budget":{"fill":null,"states":9,'
    '"seconds":1.5,"memory_bytes":64},"when_over":"stop"}'
)
"""Terms as they were written before there were prices and scenarios."""


def test_jobs_accepted_before_there_were_add_ons_stay_readable(path: Path) -> None:
    store = SqlStore(path.parent)
    store.start()
    job = submit(store)
    store.stop()
    with sqlite3.connect(path) as connection:
        connection.execute("UPDATE jobs SET terms = ?", (FIRST_TERMS,))
    connection.close()
    store = SqlStore(path.parent)
    store.start()
    found = store.job(ANN, job.id)
    assert found.question == Question(QuestionName.COLOURABLE_SUBGRAPH, (1,), (), 3)
    assert (found.budget, found.when_over) == (Budget(None, 9, 1.5, 64), WhenOver.STOP)
    store.stop()


def test_newer_database_is_refused_and_left_alone(path: Path) -> None:
    with sqlite3.connect(path) as connection:
        connection.execute("INSERT INTO schema_version VALUES (7, 0)")
    connection.close()
    store = SqlStore(path.parent)
    with pytest.raises(
        StoreUnavailable, match=r"schema version 7, this server knows up to 1: .*newer server"
    ) as caught:
        store.start()
    assert str(path) in str(caught.value)
    store.stop()


def test_failed_migration_leaves_the_version_before(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    broken = (*migrations.VERSIONS, ("CREATE TABLE half (x $bytes)", "CREATE TABLE nonsense ("))
    with monkeypatch.context() as patch:
        patch.setattr(migrations, "VERSIONS", broken)
        with pytest.raises(StoreUnavailable, match=r"nearchord\.db"):
            SqlStore(path.parent).start()
    store = SqlStore(path.parent)
    store.start()
    job = submit(store)
    assert store.job(ANN, job.id) == job
    store.stop()
    engine = create_engine(f"sqlite:///{path}")
    assert "half" not in inspect(engine).get_table_names()
    engine.dispose()


def test_damaged_database_is_named_with_the_remedy(path: Path) -> None:
    path.write_bytes(b"not a database at all" * 100)
    with pytest.raises(StoreUnavailable, match=r"nearchord\.db: file is not a database; .*backup"):
        SqlStore(path.parent).start()
