"""What holds for the whole suite: where compiled kernels are kept, how often tests that kill processes are run."""

from __future__ import annotations

import os

import pytest
from nearchord_service.work.local import kernel_cache

os.environ.update(kernel_cache.prepare("nearchord_solve", os.environ))  # before anything imports numba


def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    """Repeat every test marked `fault` NEARCHORD_FAULT_ROUNDS times (`tests/run.sh --faults`: ten): races hide."""
    rounds = int(os.environ.get("NEARCHORD_FAULT_ROUNDS", "1"))
    if rounds > 1 and metafunc.definition.get_closest_marker("fault") is not None:
        metafunc.fixturenames.append("fault_round")
        metafunc.parametrize("fault_round", range(1, rounds + 1), ids=lambda number: f"round {number}")
