"""Who calls. Content, jobs and request ids belong to owners; nobody sees what is another's."""

from __future__ import annotations

from typing import Any, TypeAlias

import grpc

Context: TypeAlias = "grpc.aio.ServicerContext[Any, Any]"

EVERYBODY = ""


def owner(_context: Context) -> str:
    """Return the owner on whose behalf a call is made. Without tokens everybody is the same owner."""
    return EVERYBODY
