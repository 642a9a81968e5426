"""Kernels are compiled part by part in children, once for each folder they are kept in."""

from __future__ import annotations

import os
from pathlib import Path
from types import SimpleNamespace

import pytest
from nearchord_service.work.local import compiling, kernel_cache


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Where kernels are kept."""
    monkeypatch.setenv(kernel_cache.VARIABLE, str(tmp_path))
    return tmp_path


def solver(folder: Path, *, failing: str = "") -> SimpleNamespace:
    """Two parts; each leaves a file that says which process ran it."""

    def warm_up(report, part):
        report(0, 2)
        if part == failing:
            raise ValueError(part)
        report(1, 2)
        (folder / f"ran-{part}").write_text(str(os.getpid()))
        report(2, 2)

    return SimpleNamespace(WARM_PARTS=("one", "other"), warm_up=warm_up)


def runs(folder: Path) -> dict[str, int]:
    return {path.name: int(path.read_text()) for path in folder.glob("ran-*")}


def test_each_part_runs_in_a_child_of_its_own_and_is_heard(folder: Path) -> None:
    """The caller compiles nothing, and whoever waits sees shares ascend to all."""
    shares: list[float] = []
    compiling.compile_ahead(solver(folder), shares.append)
    ran = runs(folder)
    assert set(ran) == {"ran-one", "ran-other"}
    assert len({os.getpid(), *ran.values()}) == 3
    assert shares == sorted(shares)
    assert shares[-1] == 1.0


def test_what_was_compiled_is_not_compiled_again(folder: Path) -> None:
    """A second start goes straight to loading."""
    compiling.compile_ahead(solver(folder), lambda share: None)
    first = runs(folder)
    compiling.compile_ahead(solver(folder), lambda share: None)
    assert runs(folder) == first


def test_a_part_that_fails_is_tried_again_by_the_next_start(folder: Path, capfd: pytest.CaptureFixture[str]) -> None:
    """Its failure is in the log, harms nothing here, and is not taken for done."""
    compiling.compile_ahead(solver(folder, failing="other"), lambda share: None)
    assert set(runs(folder)) == {"ran-one"}
    assert "ValueError: other" in capfd.readouterr().err
    compiling.compile_ahead(solver(folder), lambda share: None)
    assert set(runs(folder)) == {"ran-one", "ran-other"}


def test_nothing_runs_without_parts_or_a_place_to_keep_them(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Then the nursery's own warm-up is all there is."""
    compiling.compile_ahead(SimpleNamespace(), lambda share: None)
    monkeypatch.delenv(kernel_cache.VARIABLE)
    compiling.compile_ahead(solver(folder), lambda share: None)
    assert runs(folder) == {}
