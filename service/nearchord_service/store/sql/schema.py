"""The tables as they are now. How a database gets there is said in `migrations`.

Times are integers: microseconds since 1970-01-01 UTC. `number` is a row's own number and ascends in commit order: a job
has the number of its first event, a batch one of its own from the same counter. Nothing here refers by foreign key: the
one writer keeps the tables consistent, and the tests count after it.
"""

from __future__ import annotations

from sqlalchemy import BigInteger, Column, Index, Integer, LargeBinary, MetaData, Table, Text

from nearchord_service.store.sql.statement import word

metadata = MetaData()
_KEY = BigInteger().with_variant(Integer, "sqlite")

counters = Table(
    "counters", metadata, Column("name", Text, primary_key=True), Column("value", BigInteger, nullable=False)
)

usage = Table(
    "usage",
    metadata,
    Column("owner", Text, primary_key=True),
    Column("unfinished_jobs", BigInteger, nullable=False),
    Column("content_bytes", BigInteger, nullable=False),
)

requests = Table(
    "requests",
    metadata,
    Column("owner", Text, primary_key=True),
    Column("request_id", Text, primary_key=True),
    Column("fingerprint", LargeBinary, nullable=False),
    Column("batch", BigInteger),
    Column("job", BigInteger),
)

batches = Table(
    "batches",
    metadata,
    Column("number", _KEY, primary_key=True),
    Column("id", Text, nullable=False),
    Column("owner", Text, nullable=False),
    Column("label", Text, nullable=False),
    Column("request_id", Text, nullable=False),
    Column("created_at", BigInteger, nullable=False),
    Index("batches_id", "id", unique=True),
)

jobs = Table(
    "jobs",
    metadata,
    Column("number", _KEY, primary_key=True),
    Column("id", Text, nullable=False),
    Column("owner", Text, nullable=False),
    Column("batch", BigInteger),
    Column("batch_index", Integer, nullable=False),
    Column("request_id", Text),
    Column("label", Text, nullable=False),
    Column("graph_address", Text, nullable=False),
    Column("weights_address", Text),
    Column("names_address", Text),
    Column("vertices", BigInteger, nullable=False),
    Column("edges", BigInteger, nullable=False),
    Column("terms", Text, nullable=False),
    Column("priority", Integer, nullable=False),
    Column("not_after", BigInteger),
    Column("stage", Text, nullable=False),
    Column("verdict", Text),
    Column("reason", Text, nullable=False),
    Column("attempt", Integer, nullable=False),
    Column("lost_workers", Integer, nullable=False),
    Column("cancel_requested", Integer, nullable=False),
    Column("lease_holder", Text),
    Column("lease_until", BigInteger),
    Column("created_at", BigInteger, nullable=False),
    Column("started_at", BigInteger),
    Column("finished_at", BigInteger),
    Column("sequence", BigInteger, nullable=False),
    Column("answer_bytes", BigInteger, nullable=False),
    Column("trimmed", Integer, nullable=False),
    Index("jobs_id", "id", unique=True),
)
"""`terms` is JSON: question, budget, what to do when over. `trimmed` says that retention took the earlier events."""

_waiting = jobs.c.stage == word("WAITING")
_solving = jobs.c.stage == word("SOLVING")
_unfinished = jobs.c.finished_at.is_(None)


def _where(name: str, condition: object, *columns: object) -> Index:
    return Index(name, *columns, sqlite_where=condition, postgresql_where=condition)  # type: ignore[arg-type]


_where("jobs_queue", _waiting, jobs.c.priority.desc(), jobs.c.number, jobs.c.created_at)
_where("jobs_overdue", _waiting & jobs.c.not_after.is_not(None), jobs.c.not_after)
_where("jobs_leased", _solving, jobs.c.lease_until)
_where("jobs_graph_needed", _unfinished, jobs.c.graph_address)
_where("jobs_weights_needed", _unfinished & jobs.c.weights_address.is_not(None), jobs.c.weights_address)
_where("jobs_names_needed", _unfinished & jobs.c.names_address.is_not(None), jobs.c.names_address)
_where("jobs_ended", jobs.c.finished_at.is_not(None), jobs.c.finished_at, jobs.c.trimmed, jobs.c.answer_bytes)
_where("jobs_of_batch", jobs.c.batch.is_not(None), jobs.c.batch, jobs.c.batch_index)
_where("jobs_stages_of_batch", jobs.c.batch.is_not(None), jobs.c.batch, jobs.c.stage)
_where("jobs_label", jobs.c.label != word(""), jobs.c.owner, jobs.c.label, jobs.c.number)
Index("jobs_owner", jobs.c.owner, jobs.c.number)

events = Table(
    "events",
    metadata,
    Column("sequence", _KEY, primary_key=True),
    Column("job", BigInteger, nullable=False),
    Column("batch", BigInteger),
    Column("time", BigInteger, nullable=False),
    Column("attempt", Integer, nullable=False),
    Column("stage", Text, nullable=False),
    Column("verdict", Text),
    Column("reason", Text, nullable=False),
    Index("events_job", "job", "sequence"),
)
_where("events_batch", events.c.batch.is_not(None), events.c.batch, events.c.sequence)

progress = Table(
    "progress",
    metadata,
    Column("job", _KEY, primary_key=True),
    Column("batch", BigInteger),
    Column("sequence", BigInteger, nullable=False),
    Column("time", BigInteger, nullable=False),
    Column("attempt", Integer, nullable=False),
    Column("figures", Text, nullable=False),
)
_where("progress_batch", progress.c.batch.is_not(None), progress.c.batch, progress.c.sequence)

answers = Table(
    "answers",
    metadata,
    Column("job", _KEY, primary_key=True),
    Column("figures", Text, nullable=False),
    Column("columns", LargeBinary, nullable=False),
)

contents = Table(
    "contents",
    metadata,
    Column("owner", Text, primary_key=True),
    Column("address", Text, primary_key=True),
    Column("kind", Text, nullable=False),
    Column("size_bytes", BigInteger, nullable=False),
    Column("vertices", BigInteger, nullable=False),
    Column("edges", BigInteger, nullable=False),
    Column("created_at", BigInteger, nullable=False),
    Column("used_at", BigInteger, nullable=False),
    Index("contents_address", "address"),
)
"""Who may see which content."""

blobs = Table(
    "blobs",
    metadata,
    Column("address", Text, primary_key=True),
    Column("size_bytes", BigInteger, nullable=False),
    Column("data", LargeBinary),
    Column("file", Text),
)
"""Where bytes are, once for all owners: in the row, or in a file of the content folder."""

uploads = Table(
    "uploads",
    metadata,
    Column("owner", Text, primary_key=True),
    Column("address", Text, primary_key=True),
    Column("kind", Text, nullable=False),
    Column("size_bytes", BigInteger, nullable=False),
    Column("file", Text, nullable=False),
    Column("touched_at", BigInteger, nullable=False),
)
