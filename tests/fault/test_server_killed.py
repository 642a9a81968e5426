"""A server that is killed leaves no process behind, whatever its processes are doing."""

from __future__ import annotations

import json
import os
import select
import signal
import subprocess
import sys
from pathlib import Path

import pytest

pytestmark = pytest.mark.fault
WAIT = 30.0
ENDLESS = "fault.endless_warming_solver"
SCRIPTED = "contract.scripted_solver"


def start(solver, script):
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(path for path in sys.path if path)}
    program = Path(__file__).with_name("lone_server.py")
    server = subprocess.Popen([sys.executable, program, solver, script], stdout=subprocess.PIPE, env=environment)
    return server, json.loads(server.stdout.readline())


def assert_all_end(processes):
    for process in processes:
        ended, _, _ = select.select([process], [], [], WAIT)
        assert ended, "a process outlived its server"


@pytest.mark.parametrize(
    ("solver", "script", "processes"),
    [(SCRIPTED, "DEAF", 3), (SCRIPTED, "STOP_SELF", 3), (SCRIPTED, "UNTIL_STOPPED", 3), (ENDLESS, "WARMING", 1)],
)
def test_no_process_outlives_a_killed_server(solver, script, processes):
    """Busy, stopped and waiting workers end with their server, and so does a nursery that compiles."""
    server, pids = start(solver, script)
    watched = [os.pidfd_open(pid) for pid in pids]
    try:
        assert len(pids) == processes
        server.send_signal(signal.SIGKILL)
        server.wait(WAIT)
        assert_all_end(watched)
    finally:
        server.kill()
        server.wait(WAIT)
        server.stdout.close()
        for process in watched:
            os.close(process)
