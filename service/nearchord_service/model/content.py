"""Stored content: graphs, weights and names, each known by the SHA-256 of its bytes."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path


class ContentKind(StrEnum):
    """What stored bytes mean."""

    GRAPH = "graph"
    WEIGHTS = "weights"
    NAMES = "names"


@dataclass(frozen=True)
class Content:
    """Stored content as its owner sees it. `vertices` counts weights or names for those kinds; `edges` is 0 there."""

    owner: str
    address: str
    kind: ContentKind
    size_bytes: int
    vertices: int
    edges: int
    created_at: dt.datetime


@dataclass(frozen=True)
class NewContent:
    """Content that travels with a submit and becomes durable together with its job."""

    address: str
    kind: ContentKind
    data: bytes
    vertices: int
    edges: int


@dataclass(frozen=True)
class Bytes:
    """Where the bytes of content are: in memory, or in a file that does not change while a lease needs it."""

    data: bytes | None
    path: Path | None
