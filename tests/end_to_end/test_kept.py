"""Structures kept by a real server, in its data folder."""

from __future__ import annotations

import shutil
from pathlib import Path

import nearchord
import numpy as np
from bench.generators import time_windows

TIMEOUT = 240.0


def test_later_jobs_on_a_graph_give_the_same_answers_with_what_was_kept_and_without(tmp_path: Path) -> None:
    """The folder appears with the first job, and may be deleted under a running server."""
    windows = time_windows(30_000, 20.0, 60, 1)
    graph = nearchord.Graph.from_arrays(windows.n, windows.low, windows.high, windows.weights)
    kept = tmp_path / "data" / "kept"
    with nearchord.embedded(tmp_path / "data", workers=1) as service:

        def answer() -> nearchord.Answer:
            return service.submit(graph, nearchord.IndependentSet()).answer(timeout=TIMEOUT)

        first, second = answer(), answer()
        assert len(list(kept.iterdir())) == 1
        shutil.rmtree(kept)
        third = answer()
    phases = [{phase for phase, _ in found.provenance.phases} for found in (first, second, third)]
    assert [any("ORDER" in str(phase).upper() for phase in names) for names in phases] == [True, False, True]
    for later in (second, third):
        assert (later.verdict, later.value, later.fill) == (first.verdict, first.value, first.fill)
        assert np.array_equal(later.chosen, first.chosen)
