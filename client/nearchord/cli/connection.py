"""Which service a command talks to, and with which token."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import AbstractContextManager, contextmanager
from pathlib import Path

import nearchord
from nearchord.cli.exits import Interrupted, usage
from nearchord.cli.progress import Display

STANDARD_SERVER = "127.0.0.1:7411"


def token() -> str | None:
    """The token from the environment, or from the file named there; None without one."""
    if direct := os.environ.get("NEARCHORD_TOKEN"):
        return direct
    if not (file := os.environ.get("NEARCHORD_TOKEN_FILE")):
        return None
    try:
        return Path(file).read_text(encoding="utf-8").strip()
    except (OSError, UnicodeDecodeError) as error:
        raise usage(f"NEARCHORD_TOKEN_FILE: {file} cannot be read ({error})", "name a readable text file") from None


def tls() -> str | bool | None:
    """Whether calls are encrypted, by NEARCHORD_TLS: `system` root certificates, or a PEM file of others."""
    chosen = os.environ.get("NEARCHORD_TLS") or None
    return True if chosen == "system" else chosen


def remote(server: str | None) -> AbstractContextManager[nearchord.Service]:
    """A connection to the named service, or to the standard address on this machine."""
    return nearchord.connect(server or STANDARD_SERVER, token=token(), tls=tls())


def remote_or_private(server: str | None, display: Display) -> AbstractContextManager[nearchord.Service]:
    """A connection to the named service, or a private one of this command's own."""
    if server:
        return remote(server)
    display.say("starting a private service")
    return nearchord.embedded()


@contextmanager
def detaching(kind: str, identity: str, server: str | None) -> Iterator[None]:
    """Turn Ctrl-C into a message: how to come back to work on a server, or that a private service ended with it."""
    try:
        yield
    except KeyboardInterrupt:
        raise Interrupted(_farewell(kind, identity, server)) from None


def _farewell(kind: str, identity: str, server: str | None) -> str:
    if server is None:
        return f"interrupted; the private service ended, and {kind} {identity} with it"
    which = f"{'--batch ' if kind == 'batch' else ''}{identity}"
    where = "" if server == os.environ.get("NEARCHORD_SERVER", STANDARD_SERVER) else f" --server {server}"
    again = [f"  nearchord {command} {which}{where}" for command in ("watch", "answer", "cancel")]
    return "\n".join([f"detached; the {kind} goes on. To resume, to read its answer, or to withdraw it:", *again])
