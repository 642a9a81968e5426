"""The nursery process: compiles the kernels once, then forks a hot worker whenever the server asks for one.

It has a single thread, runs no solve, and ends with the server (see `guard`). It is a small fork server of our own
because the standard library's would import the server's main module into every worker, hides errors of what it
preloads, and is one per process.

Life: warm up (telling how far) -> say Warm -> obey Fork and Kill and tell Exited, until the server's socket closes.
"""

from __future__ import annotations

import gc
import importlib
import json
import logging
import mmap
import os
import select
import signal
import socket
import sys
import traceback
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NoReturn

from nearchord_service.work.kept import Shelf
from nearchord_service.work.local import compiling, guard, kernel_cache, wire, worker
from nearchord_service.work.local.messages import Exited, Failed, Fork, Forked, Kill, Warm, Warming

_LOG = logging.getLogger(__name__)


@dataclass(frozen=True)
class Orders:
    """What the server passes on the command line: descriptors to inherit, the solver's module name, what to keep where.

    Without `keep_folder` nothing is kept.
    """

    control: int
    lifeline: int
    cells: int
    solver: str
    keep_folder: str | None = None
    keep_bytes: int = 0


def main(orders: str) -> None:
    """Run a nursery; `orders` is JSON of `Orders`."""
    given = Orders(**json.loads(orders))
    logging.basicConfig(stream=sys.stderr, format="%(asctime)s %(levelname)s %(process)d %(name)s: %(message)s")
    guard.ignore_terminal_signals()
    guard.hang_on(given.lifeline)
    with socket.socket(fileno=given.control) as control:
        solver = _warm(control, given.solver)
        if solver is not None:
            Nursery(control, mmap.mmap(given.cells, 0), solver, _shelf(given, solver)).run()


def _shelf(given: Orders, solver: Any) -> Shelf | None:
    if given.keep_folder is None:
        return None
    sources = kernel_cache.digest(Path(solver.__file__).parent)
    return Shelf(Path(given.keep_folder), given.keep_bytes, f"{solver.VERSION} {sources}")


def _warm(control: socket.socket, name: str) -> Any:
    """Import the solver and call its kernels once; None when that failed (the server is told why)."""
    try:
        solver = importlib.import_module(name)
        compiling.compile_ahead(solver, lambda share: wire.send(control, Warming(share)))
        solver.warm_up(lambda done, total: wire.send(control, Warming(done / total if total else 1.0)))
    except ConnectionError:
        return None
    except Exception as error:
        traceback.print_exc()
        wire.send(control, Failed(f"{type(error).__name__}: {error}"[:2000]))
        return None
    gc.collect()
    gc.freeze()
    wire.send(control, Warm())
    return solver


class Nursery:
    """Forks, kills and reaps workers by order of the server."""

    def __init__(self, control: socket.socket, block: mmap.mmap, solver: Any, shelf: Shelf | None) -> None:
        self._control = control
        self._block = block
        self._solver = solver
        self._shelf = shelf
        self._children: set[int] = set()
        self._bell, self._bell_end = os.pipe2(os.O_NONBLOCK | os.O_CLOEXEC)

    def run(self) -> None:
        """Serve until the server's socket closes."""
        signal.signal(signal.SIGCHLD, lambda *_: None)
        signal.set_wakeup_fd(self._bell_end)
        try:
            while True:
                ready, _, _ = select.select([self._control.fileno(), self._bell], [], [])
                if self._bell in ready:
                    os.read(self._bell, 4096)
                    self._reap()
                if self._control.fileno() in ready:
                    self._obey()
        except (EOFError, ConnectionError):
            for pid in self._children:
                os.kill(pid, signal.SIGKILL)

    def _reap(self) -> None:
        for pid in tuple(self._children):
            ended, status = os.waitpid(pid, os.WNOHANG)
            if ended:
                self._children.discard(pid)
                wire.send(self._control, Exited(pid, os.waitstatus_to_exitcode(status)))

    def _obey(self) -> None:
        order, fds = wire.receive(self._control)
        if isinstance(order, Fork):
            (end,) = fds
            self._fork(order.slot, end)
        elif isinstance(order, Kill) and order.pid in self._children:
            os.kill(order.pid, signal.SIGKILL)

    def _fork(self, slot: int, end: int) -> None:
        nursery = os.getpid()
        pid = os.fork()
        if pid == 0:
            self._become_worker(nursery, slot, end)
        os.close(end)
        self._children.add(pid)
        wire.send(self._control, Forked(slot, pid))

    def _become_worker(self, nursery: int, slot: int, end: int) -> NoReturn:
        """Be a worker until its socket closes; never returns into the nursery's code."""
        status = 1
        try:
            guard.die_with_parent(nursery)
            guard.be_the_first_to_go()
            signal.set_wakeup_fd(-1)
            signal.signal(signal.SIGCHLD, signal.SIG_DFL)
            self._control.close()
            os.close(self._bell)
            os.close(self._bell_end)
            worker.serve(socket.socket(fileno=end), self._block, slot, self._solver, self._shelf)
            status = 0
        except BaseException:
            traceback.print_exc()
        finally:
            sys.stderr.flush()
            os._exit(status)
