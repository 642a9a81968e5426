"""Where compiled kernels are kept from one start to the next: one folder for each state of the solver's sources.

numba keeps a compiled kernel until the file that defines it changes; it does not see a change in a kernel that this one
calls, so after an update it could run old code. A folder named by a digest of all sources cannot: another source,
another folder.
"""

from __future__ import annotations

import hashlib
import importlib.util
import os
import shutil
from collections.abc import Mapping
from pathlib import Path

VARIABLE = "NUMBA_CACHE_DIR"
KEPT = 3
"""Folders of other states of the sources that are left alone, the latest used ones."""


def prepare(solver: str, environ: Mapping[str, str]) -> dict[str, str]:
    """Return what to add to a process's environment so that its kernels are kept where they belong.

    `solver` names the solver's package, which is found but not imported. The folder is made under the one that
    `environ` names in NUMBA_CACHE_DIR, else under the user's cache folder, and folders long unused are removed. Where
    nothing can be written, or `solver` is no package, nothing is added and numba decides. O(bytes of the sources).
    """
    spec = importlib.util.find_spec(solver)
    if spec is None or not spec.submodule_search_locations:
        return {}
    name = digest(Path(spec.submodule_search_locations[0]))
    base = _base(environ)
    folder = base if base.name == name else base / name
    try:
        folder.mkdir(parents=True, exist_ok=True)
        os.utime(folder)
        _forget_old(folder)
    except OSError:
        return {}
    return {VARIABLE: str(folder)} if os.access(folder, os.W_OK) else {}


def digest(package: Path) -> str:
    """Return 16 hexadecimal digits that stand for the Python sources below `package`."""
    state = hashlib.sha256()
    for path in sorted(package.rglob("*.py")):
        source = path.read_bytes()
        state.update(f"{path.relative_to(package).as_posix()}\0{len(source)}\0".encode())
        state.update(source)
    return state.hexdigest()[:16]


def _base(environ: Mapping[str, str]) -> Path:
    if named := environ.get(VARIABLE):
        return Path(named)
    cache = environ.get("XDG_CACHE_HOME")
    return (Path(cache) if cache else Path.home() / ".cache") / "nearchord" / "kernels"


def _forget_old(folder: Path) -> None:
    """Remove all but the latest used folders beside `folder` whose names look like ours."""
    others = [path for path in folder.parent.iterdir() if path != folder and _is_ours(path)]
    others.sort(key=lambda path: path.stat().st_mtime, reverse=True)
    for path in others[KEPT:]:
        shutil.rmtree(path, ignore_errors=True)


def _is_ours(path: Path) -> bool:
    return len(path.name) == 16 and set(path.name) <= set("0123456789abcdef") and path.is_dir()
