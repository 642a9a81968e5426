"""Exit codes, which scripts rely on, and how a failure becomes one message with one of them."""

from __future__ import annotations

from enum import IntEnum

import click

import nearchord
from nearchord import Verdict


class Exit(IntEnum):
    """What a command's exit code says."""

    ANSWERED = 0
    """PROVEN or BOUNDED; for `batch`, every line."""
    OTHER = 1
    """Another verdict, not confirmed, or not ended yet."""
    USAGE = 2
    """Usage or bad input."""
    CANCELLED = 3
    """The job was cancelled, or Ctrl-C ended the waiting."""
    UNREACHABLE = 4
    """No service could be reached or started."""


class Interrupted(Exception):
    """Ctrl-C ended a command; the text says what goes on and how to come back to it."""


def of_verdict(verdict: Verdict) -> Exit:
    """The code for a job that ended with this verdict."""
    if verdict.answered:
        return Exit.ANSWERED
    return Exit.CANCELLED if verdict is Verdict.CANCELLED else Exit.OTHER


def of_verdicts(verdicts: list[Verdict]) -> Exit:
    """The code for several jobs: another verdict weighs more than a cancel."""
    codes = {of_verdict(verdict) for verdict in verdicts}
    return Exit.OTHER if Exit.OTHER in codes else max(codes, default=Exit.ANSWERED)


def of_error(error: nearchord.NearchordError) -> Exit:
    """The code for a failure of the client or of a call."""
    match error:
        case nearchord.Unreachable() | nearchord.EmbeddedFailed() | nearchord.TimeoutExceeded():
            return Exit.UNREACHABLE
        case nearchord.NotReady() | nearchord.CheckFailed() | nearchord.ServerFault():
            return Exit.OTHER
        case _:
            return Exit.USAGE


def usage(problem: str, remedy: str) -> click.UsageError:
    """A usage error that says what is wrong and what to do."""
    return click.UsageError(f"{problem}; {remedy}")
