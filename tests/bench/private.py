"""A private service for a measurement: started with a kernel cache of our choice, and waited for until warm."""

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from time import perf_counter

import nearchord

from bench import machine, small


@contextmanager
def warm(data: Path) -> Iterator[nearchord.Service]:
    """A service on the data folder whose workers have all answered something."""
    with nearchord.embedded(data) as service:
        items = [
            nearchord.JobRequest(graph, nearchord.IndependentSet()) for graph in small.graphs(4 * machine.cores(), 0)
        ]
        list(service.submit_batch(items).answers())
        yield service


def start_to_answer(data: Path, kernels: Path) -> float:
    """Seconds from starting a new server, with its compiled kernels in ``kernels``, to its first answer."""
    (graph,) = small.graphs(1, 0)
    with _environment("NUMBA_CACHE_DIR", str(kernels)):
        begun = perf_counter()
        with nearchord.embedded(data) as service:
            service.submit(graph, nearchord.IndependentSet()).answer()
            return perf_counter() - begun


@contextmanager
def _environment(name: str, value: str) -> Iterator[None]:
    before = os.environ.get(name)
    os.environ[name] = value
    try:
        yield
    finally:
        if before is None:
            del os.environ[name]
        else:
            os.environ[name] = before
