"""Why a worker ended without an answer, in words."""

from __future__ import annotations

import signal

from nearchord_service.model.event import Progress
from nearchord_service.work.local.messages import OutOfMemory
from nearchord_service.work.port import LossCause, Lost, Task


def killed(task: Task, cause: LossCause | None, status: int | None, grace: float, progress: Progress) -> Lost:
    """Return the end of a task whose worker is gone; `cause` None when nobody asked for it."""
    if cause is LossCause.SECONDS:
        reason = (
            f"the {task.budget.seconds:g} seconds budgeted had passed and the solve did not stop within {grace:g} "
            "seconds more, so its worker was ended"
        )
    elif cause is LossCause.CANCEL:
        reason = f"cancelled; the solve did not stop within {grace:g} seconds, so its worker was ended"
    elif cause is LossCause.SHUTDOWN:
        reason = "the server shut down before the solve had ended"
    else:
        cause, reason = LossCause.DIED, f"the worker process {_how(status)} before it answered"
    return Lost(cause, reason, progress)


def out_of_memory(task: Task, message: OutOfMemory, progress: Progress) -> Lost:
    """Return the end of a task that the memory limit stopped."""
    reason = (
        f"the solve needed more than the {task.budget.memory_bytes} bytes of memory budgeted and was ended "
        f"(its worker held up to {message.peak_bytes} bytes in all); allow more memory"
    )
    return Lost(LossCause.MEMORY, reason, progress)


def never_began(cause: LossCause) -> Lost:
    """Return the end of a task that no worker had begun."""
    what = "the server shut down" if cause is LossCause.SHUTDOWN else "cancelled"
    return Lost(cause, f"{what} before a worker had begun the job", None)


def _how(status: int | None) -> str:
    if status is None:
        return "was lost together with the process that forks workers"
    if status < 0:
        return f"was ended by signal {-status} ({signal.strsignal(-status)})"
    return f"exited with status {status}"
