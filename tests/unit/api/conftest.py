"""A server for each test."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import ExitStack
from itertools import count
from pathlib import Path
from typing import Any

import pytest
from nearchord_service.metrics import Metrics
from nearchord_service.store.port import Store
from nearchord_service.store.sql import SqlStore
from prometheus_client import CollectorRegistry
from unit.api.serving import Serving


@pytest.fixture
def serve(tmp_path: Path) -> Iterator[Callable[..., Serving]]:
    """Start servers with settings, or a store, of a test's own."""
    with ExitStack() as running:
        number = count()

        def start(store: Callable[..., Store] = SqlStore, **settings: Any) -> Serving:
            data = tmp_path / str(next(number))
            metrics = Metrics(CollectorRegistry())
            return running.enter_context(Serving(data, store(data, on_end=metrics.job_ended), metrics, **settings))

        yield start


@pytest.fixture
def served(serve: Callable[..., Serving]) -> Serving:
    """A server with small caps."""
    return serve(inline_bytes=4_096, content_bytes=2**24, batch_jobs=200, pins=100)
