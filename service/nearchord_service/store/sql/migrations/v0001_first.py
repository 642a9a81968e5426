"""Version 1: jobs, events, answers, content."""

from __future__ import annotations

STATEMENTS = (
    "CREATE TABLE counters (name TEXT NOT NULL PRIMARY KEY, value BIGINT NOT NULL)",
    "INSERT INTO counters (name, value) VALUES ('event', 0)",
    """CREATE TABLE usage (
        owner TEXT NOT NULL PRIMARY KEY,
        unfinished_jobs BIGINT NOT NULL,
        content_bytes BIGINT NOT NULL
    )""",
    """CREATE TABLE requests (
        owner TEXT NOT NULL,
        request_id TEXT NOT NULL,
        fingerprint $bytes NOT NULL,
        batch BIGINT,
        job BIGINT,
        PRIMARY KEY (owner, request_id)
    ) $clustered""",
    """CREATE TABLE batches (
        number $key NOT NULL PRIMARY KEY,
        id TEXT NOT NULL,
        owner TEXT NOT NULL,
        label TEXT NOT NULL,
        request_id TEXT NOT NULL,
        created_at BIGINT NOT NULL
    )""",
    "CREATE UNIQUE INDEX batches_id ON batches (id)",
    """CREATE TABLE jobs (
        number $key NOT NULL PRIMARY KEY,
        id TEXT NOT NULL,
        owner TEXT NOT NULL,
        batch BIGINT,
        batch_index INTEGER NOT NULL,
        request_id TEXT,
        label TEXT NOT NULL,
        graph_address TEXT NOT NULL,
        weights_address TEXT,
        names_address TEXT,
        vertices BIGINT NOT NULL,
        edges BIGINT NOT NULL,
        terms TEXT NOT NULL,
        priority INTEGER NOT NULL,
        not_after BIGINT,
        stage TEXT NOT NULL,
        verdict TEXT,
        reason TEXT NOT NULL,
        attempt INTEGER NOT NULL,
        lost_workers INTEGER NOT NULL,
        cancel_requested INTEGER NOT NULL,
        lease_holder TEXT,
        lease_until BIGINT,
        created_at BIGINT NOT NULL,
        started_at BIGINT,
        finished_at BIGINT,
        sequence BIGINT NOT NULL,
        answer_bytes BIGINT NOT NULL,
        trimmed INTEGER NOT NULL
    )""",
    "CREATE UNIQUE INDEX jobs_id ON jobs (id)",
    "CREATE INDEX jobs_owner ON jobs (owner, number)",
    "CREATE INDEX jobs_queue ON jobs (priority DESC, number, created_at) WHERE stage = 'WAITING'",
    "CREATE INDEX jobs_overdue ON jobs (not_after) WHERE stage = 'WAITING' AND not_after IS NOT NULL",
    "CREATE INDEX jobs_leased ON jobs (lease_until) WHERE stage = 'SOLVING'",
    "CREATE INDEX jobs_graph_needed ON jobs (graph_address) WHERE finished_at IS NULL",
    "CREATE INDEX jobs_weights_needed ON jobs (weights_address)"
    " WHERE finished_at IS NULL AND weights_address IS NOT NULL",
    "CREATE INDEX jobs_names_needed ON jobs (names_address) WHERE finished_at IS NULL AND names_address IS NOT NULL",
    "CREATE INDEX jobs_ended ON jobs (finished_at, trimmed, answer_bytes) WHERE finished_at IS NOT NULL",
    "CREATE INDEX jobs_of_batch ON jobs (batch, batch_index) WHERE batch IS NOT NULL",
    "CREATE INDEX jobs_stages_of_batch ON jobs (batch, stage) WHERE batch IS NOT NULL",
    "CREATE INDEX jobs_label ON jobs (owner, label, number) WHERE label != ''",
    """CREATE TABLE events (
        sequence $key NOT NULL PRIMARY KEY,
        job BIGINT NOT NULL,
        batch BIGINT,
        time BIGINT NOT NULL,
        attempt INTEGER NOT NULL,
        stage TEXT NOT NULL,
        verdict TEXT,
        reason TEXT NOT NULL
    )""",
    "CREATE INDEX events_job ON events (job, sequence)",
    "CREATE INDEX events_batch ON events (batch, sequence) WHERE batch IS NOT NULL",
    """CREATE TABLE progress (
        job $key NOT NULL PRIMARY KEY,
        batch BIGINT,
        sequence BIGINT NOT NULL,
        time BIGINT NOT NULL,
        attempt INTEGER NOT NULL,
        figures TEXT NOT NULL
    )""",
    "CREATE INDEX progress_batch ON progress (batch, sequence) WHERE batch IS NOT NULL",
    "CREATE TABLE answers (job $key NOT NULL PRIMARY KEY, figures TEXT NOT NULL, columns $bytes NOT NULL)",
    """CREATE TABLE contents (
        owner TEXT NOT NULL,
        address TEXT NOT NULL,
        kind TEXT NOT NULL,
        size_bytes BIGINT NOT NULL,
        vertices BIGINT NOT NULL,
        edges BIGINT NOT NULL,
        created_at BIGINT NOT NULL,
        used_at BIGINT NOT NULL,
        PRIMARY KEY (owner, address)
    ) $clustered""",
    "CREATE INDEX contents_address ON contents (address)",
    "CREATE TABLE blobs (address TEXT NOT NULL PRIMARY KEY, size_bytes BIGINT NOT NULL, data $bytes, file TEXT)",
    """CREATE TABLE uploads (
        owner TEXT NOT NULL,
        address TEXT NOT NULL,
        kind TEXT NOT NULL,
        size_bytes BIGINT NOT NULL,
        file TEXT NOT NULL,
        touched_at BIGINT NOT NULL,
        PRIMARY KEY (owner, address)
    ) $clustered""",
)
