"""What a session remembers between calls."""

from __future__ import annotations

from dataclasses import dataclass, field

from nearchord.load import ServerInfo

PATIENCE = 60.0
"""Seconds without a sign of life after which a flow that had heard from the server gives up."""


@dataclass
class Caller:
    """The memory of one session: its patience, the server's caps once asked for, and what is known to be stored."""

    patience: float = PATIENCE
    caps: ServerInfo | None = None
    stored: set[str] = field(default_factory=set)
