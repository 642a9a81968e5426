"""Compiled kernels are kept for exactly the sources they came from."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from nearchord_service.work.local import kernel_cache


@pytest.fixture
def package(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A package on the path with two modules, one of which calls into the other."""
    folder = tmp_path / "sources" / "invented_solver"
    (folder / "kernels").mkdir(parents=True)
    (folder / "__init__.py").write_text("")
    (folder / "kernels" / "inner.py").write_text("STEP = 1\n")
    monkeypatch.syspath_prepend(str(folder.parent))
    return folder


def test_the_folder_changes_with_any_source(package: Path, tmp_path: Path) -> None:
    """A kernel in another file may call the changed one, so nothing compiled before may be used."""
    environ = {"XDG_CACHE_HOME": str(tmp_path / "cache")}
    before = kernel_cache.prepare("invented_solver", environ)
    assert kernel_cache.prepare("invented_solver", environ) == before
    (package / "kernels" / "inner.py").write_text("STEP = 2\n")
    after = kernel_cache.prepare("invented_solver", environ)
    assert after != before
    for chosen in (before, after):
        assert Path(chosen[kernel_cache.VARIABLE]).parent == tmp_path / "cache" / "nearchord" / "kernels"


def test_moving_code_between_files_changes_the_folder(package: Path) -> None:
    """Same bytes in another file are another state."""
    before = kernel_cache.digest(package)
    (package / "kernels" / "inner.py").rename(package / "kernels" / "other.py")
    assert kernel_cache.digest(package) != before


def test_a_named_folder_is_used_and_not_nested(package: Path, tmp_path: Path) -> None:
    """An operator's folder holds ours; handing our own on to a child changes nothing."""
    named = {kernel_cache.VARIABLE: str(tmp_path / "kept")}
    chosen = kernel_cache.prepare("invented_solver", named)
    assert Path(chosen[kernel_cache.VARIABLE]) == tmp_path / "kept" / kernel_cache.digest(package)
    assert kernel_cache.prepare("invented_solver", chosen) == chosen


def test_only_the_latest_used_folders_stay(package: Path, tmp_path: Path) -> None:
    """Updates do not fill the disk, and what is not ours is left alone."""
    base = tmp_path / "kept"
    for age in range(kernel_cache.KEPT + 2):
        old = base / f"{age:016x}"
        old.mkdir(parents=True)
        os.utime(old, (1_000_000 - age, 1_000_000 - age))
    (base / "notes").mkdir()
    kernel_cache.prepare("invented_solver", {kernel_cache.VARIABLE: str(base)})
    stay = {f"{age:016x}" for age in range(kernel_cache.KEPT)} | {"notes", kernel_cache.digest(package)}
    assert {path.name for path in base.iterdir()} == stay


def test_nothing_is_added_where_nothing_can_be_kept(package: Path, tmp_path: Path) -> None:
    """A base that is a file, and a solver that is no package, leave the choice to numba."""
    (tmp_path / "file").write_text("")
    assert kernel_cache.prepare("invented_solver", {kernel_cache.VARIABLE: str(tmp_path / "file")}) == {}
    assert kernel_cache.prepare("json.decoder", {kernel_cache.VARIABLE: str(tmp_path / "kept")}) == {}
    assert kernel_cache.prepare("no_such_solver", {kernel_cache.VARIABLE: str(tmp_path / "kept")}) == {}
