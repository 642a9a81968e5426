"""Slots on this machine: one worker process each, forked warm, kept from task to task, killable at any moment.

`executor` runs in the server and supervises; `nursery` is a small process of its own that compiles the kernels once and
forks `worker` processes from then on, so that the server process itself is never forked.
"""

from nearchord_service.work.local.executor import LocalExecutor

__all__ = ["LocalExecutor"]
