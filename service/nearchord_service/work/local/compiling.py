"""Compiling kernels that are not kept yet: in processes of their own, side by side, before the nursery loads them.

The first start on a machine then takes as long as the slowest part of the warm-up, not as long as all of them, and the
nursery, whose memory every worker shares, never holds a compiler at work.
"""

from __future__ import annotations

import os
import platform
import struct
import traceback
from collections.abc import Callable, Iterable
from contextlib import suppress
from importlib import metadata
from pathlib import Path
from typing import Any

from nearchord_service.work.local import guard, kernel_cache

_STEP = struct.Struct("<IQQ")


def compile_ahead(solver: Any, report: Callable[[float], None]) -> None:
    """Have every part of the solver's warm-up run once in a child process, and tell how far they are (0 to 1).

    Does nothing where the solver has no parts, where kernels are not kept, or where all of this was done before. A
    part that fails is left to the caller's own warm-up, which then shows the error. Must be called by a process with a
    single thread.
    """
    parts = getattr(solver, "WARM_PARTS", ())
    folder = os.environ.get(kernel_cache.VARIABLE)
    if not parts or not folder:
        return
    mark = Path(folder) / f"compiled-{platform.python_version()}-{_version('numba')}"
    if mark.exists():
        return
    if _run(solver, parts, report):
        with suppress(OSError):
            mark.touch()


def _version(package: str) -> str:
    try:
        return metadata.version(package)
    except metadata.PackageNotFoundError:
        return "none"


def _run(solver: Any, parts: Iterable[str], report: Callable[[float], None]) -> bool:
    """Run each part in a child; True when all came to their end."""
    reading, writing = os.pipe()
    children = [_child(solver, part, number, reading, writing) for number, part in enumerate(parts)]
    os.close(writing)
    steps: dict[int, tuple[int, int]] = dict.fromkeys(range(len(children)), (0, 1))
    try:
        while message := os.read(reading, _STEP.size):
            number, done, total = _STEP.unpack(message)
            steps[number] = (done, max(1, total))
            report(sum(done / total for done, total in steps.values()) / len(steps))
    finally:
        os.close(reading)
        ends = [os.waitpid(child, 0)[1] for child in children]
    return not any(ends)


def _child(solver: Any, part: str, number: int, reading: int, writing: int) -> int:
    """Fork a process that runs one part; its steps are written whole, being far below what a pipe takes at once."""
    parent = os.getpid()
    child = os.fork()
    if child:
        return child
    failed = 1
    try:
        os.close(reading)
        guard.die_with_parent(parent)
        solver.warm_up(lambda done, total: os.write(writing, _STEP.pack(number, done, total)), part)
        failed = 0
    except BaseException:
        traceback.print_exc()
    finally:
        os._exit(failed)
    raise AssertionError("a child does not come back")
