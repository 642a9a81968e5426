"""Making sure that no process of the pool outlives the server, however the server ends.

Two guards, because either alone has a hole:

* the *lifeline*, a pipe whose write end only the server holds and to which nobody writes. Its read end is set to send
  SIGIO to the whole process group of the nursery when the other end closes; SIGIO is left at its default, which ends a
  process even in the middle of a kernel that never looks up;
* each worker is killed by the system when the nursery that forked it ends (the nursery has one thread, so the
  thread-wise rule of PR_SET_PDEATHSIG does not bite), which also reaches a worker that is stopped.
"""

from __future__ import annotations

import ctypes
import fcntl
import os
import select
import signal

_PR_SET_PDEATHSIG = 1


def hang_on(lifeline: int) -> None:
    """End this process group when the other end of `lifeline` closes. The caller leads its process group."""
    signal.signal(signal.SIGIO, signal.SIG_DFL)
    signal.pthread_sigmask(signal.SIG_SETMASK, ())
    fcntl.fcntl(lifeline, fcntl.F_SETOWN, -os.getpgrp())
    fcntl.fcntl(lifeline, fcntl.F_SETFL, fcntl.fcntl(lifeline, fcntl.F_GETFL) | os.O_ASYNC)
    if severed(lifeline):
        os._exit(0)


def severed(lifeline: int) -> bool:
    """Say whether the other end is closed already (it may have closed before the signal was asked for)."""
    poll = select.poll()
    poll.register(lifeline, select.POLLIN)
    return bool(poll.poll(0))


def die_with_parent(parent: int) -> None:
    """Have the system kill this process when `parent`, which forked it, ends."""
    ctypes.CDLL(None, use_errno=True).prctl(_PR_SET_PDEATHSIG, signal.SIGKILL, 0, 0, 0)
    if os.getppid() != parent:
        os._exit(0)


def ignore_terminal_signals() -> None:
    """Leave ending to the server: signals that reach the whole session or control group must not kill work."""
    for number in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP):
        signal.signal(number, signal.SIG_IGN)


def be_the_first_to_go() -> None:
    """Ask the system to end workers before the server when memory runs out; harmless where it is not allowed."""
    try:
        with open("/proc/self/oom_score_adj", "w", encoding="ascii") as file:
            file.write("500")
    except OSError:
        pass
