"""A process with a local executor at work, to be killed: prints the numbers of its processes on one line of JSON.

Run as `python lone_server.py SOLVER SCRIPT`; it never ends by itself.
"""

from __future__ import annotations

import json
import sys
import threading

from contract.executor_stage import Stage
from contract.scripted_solver import Script
from nearchord_service.work.local import LocalExecutor

SLOTS = 2


def main(solver, script):
    executor = LocalExecutor(SLOTS, solver=solver)
    stage = Stage(executor)
    if script == "WARMING":
        while executor.figures().warm_fraction == 0.0:
            threading.Event().wait(0.01)
    else:
        for one in [stage.run(Script[script]) for _ in range(SLOTS)]:
            stage.audience.first_progress(one)
    pids = [executor._pool._nursery.pid, *(slot.pid for slot in executor._pool._slots if slot.pid)]
    print(json.dumps(pids), flush=True)
    threading.Event().wait()


if __name__ == "__main__":
    main(*sys.argv[1:])
