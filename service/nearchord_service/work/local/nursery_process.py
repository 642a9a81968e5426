"""The server's end of a nursery: starting it, ordering from it, ending it."""

from __future__ import annotations

import json
import os
import socket
import subprocess
import sys
from pathlib import Path

from nearchord_service.work.local import kernel_cache, wire
from nearchord_service.work.local.messages import Fork, Kill

_PROGRAM = """\
import json, sys
sys.path[:] = json.loads(sys.argv[1])
from nearchord_service.work.local.nursery import main
main(sys.argv[2])
"""
# A library that keeps threads of its own would make forking unsafe and would fight for the cores of other slots.
_ONE_THREAD = dict.fromkeys(("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"), "1")
_END_SECONDS = 5.0


class NurseryProcess:
    """A running nursery. Used under the executor's lock; `control` does not block."""

    def __init__(self, cells: int, solver: str, keep_folder: Path | None, keep_bytes: int) -> None:
        """Start the process; it maps the shared cells file `cells` and imports the module `solver`.

        Its workers keep at most `keep_bytes` in `keep_folder` for later tasks.
        """
        self.control, control_end = wire.pair()
        lifeline_end, self._lifeline = os.pipe()
        inherited = {"control": control_end.fileno(), "lifeline": lifeline_end, "cells": cells}
        keep = {"keep_folder": None if keep_folder is None else str(keep_folder), "keep_bytes": keep_bytes}
        orders = json.dumps({**inherited, "solver": solver, **keep})
        try:
            self._process = subprocess.Popen(
                [sys.executable, "-c", _PROGRAM, json.dumps(sys.path), orders],
                env={**os.environ, **_ONE_THREAD, **kernel_cache.prepare(solver, os.environ)},
                stdin=subprocess.DEVNULL,
                stdout=subprocess.DEVNULL,
                pass_fds=tuple(inherited.values()),
                start_new_session=True,
            )
        except OSError:
            self.control.close()
            os.close(self._lifeline)
            raise
        finally:
            control_end.close()
            os.close(lifeline_end)

    @property
    def pid(self) -> int:
        """The process's number."""
        return self._process.pid

    def fork(self, slot: int) -> socket.socket:
        """Ask for a worker for `slot`; return our end of its task socket."""
        ours, theirs = wire.pair()
        try:
            wire.send(self.control, Fork(slot), [theirs.fileno()])
        except OSError:
            ours.close()
            raise
        finally:
            theirs.close()
        return ours

    def kill_worker(self, pid: int) -> None:
        """Have a worker killed."""
        wire.send(self.control, Kill(pid))

    def end(self) -> None:
        """End the nursery and with it every worker it forked. Takes a moment."""
        self.control.close()
        os.close(self._lifeline)
        self._process.kill()
        self._process.wait(_END_SECONDS)
