"""Runs a function in a fresh process, so that times start clean and peak memory is its own."""

import multiprocessing
import os
from collections.abc import Callable
from dataclasses import dataclass
from multiprocessing.connection import Connection
from pathlib import Path
from typing import Any, Generic, TypeVar

T = TypeVar("T")


@dataclass(frozen=True)
class Fresh(Generic[T]):
    """What the function returned, and the largest resident size its process ever had."""

    result: T
    peak_bytes: int


def run(function: Callable[..., T], *arguments: Any) -> Fresh[T]:
    """Call ``function(*arguments)`` in a new interpreter; ``function`` must be importable by name.

    Raises ChildProcessError if the process ends without an answer (its traceback is on stderr).
    """
    spawn = multiprocessing.get_context("spawn")
    ours, theirs = spawn.Pipe(duplex=False)
    process = spawn.Process(target=_answer, args=(theirs, function, arguments))
    process.start()
    theirs.close()
    try:
        result, peak = ours.recv()
    except EOFError:
        process.join()
        raise ChildProcessError(f"{function.__name__} ended with exit code {process.exitcode}") from None
    process.join()
    return Fresh(result, peak)


def peak_bytes() -> int:
    """Largest resident size of this process so far.

    Read from the kernel's per-address-space mark: getrusage would count the parent's size before exec.
    """
    for line in Path("/proc/self/status").read_text(encoding="ascii").splitlines():
        if line.startswith("VmHWM:"):
            return int(line.split()[1]) * 1024
    raise OSError("/proc/self/status has no VmHWM line")


def _answer(pipe: Connection, function: Callable[..., Any], arguments: tuple[Any, ...]) -> None:
    with open(os.devnull, "wb") as nowhere:
        os.dup2(nowhere.fileno(), 1)  # what a solver's library prints about itself is no part of the tables
    result = function(*arguments)
    pipe.send((result, peak_bytes()))
    pipe.close()
