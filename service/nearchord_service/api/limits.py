"""Caps on what one call may carry, and the checks of them."""

from __future__ import annotations

import re
from dataclasses import dataclass

from nearchord_service.model.errors import FieldInvalid, FieldViolation, QuotaExceeded
from nearchord_service.model.question import Budget
from nearchord_service.settings import Settings
from nearchord_service.store.port import Limits

MESSAGE_BYTES = 4 * 2**20
"""Largest message in either direction; whatever may be larger travels in pieces."""

PIECE_BYTES = 2**20
"""Largest piece of content or of a column."""

LABEL_CHARACTERS = 200
PRIORITIES = (-1_000, 1_000)
PAGE_SIZES = (1, 1_000)
LOAD_INTERVALS = (0.2, 60.0)

_REQUEST_ID = re.compile(r"[A-Za-z0-9_-]{1,64}", re.ASCII)
_ADDRESS = re.compile(r"[0-9a-f]{64}", re.ASCII)


@dataclass(frozen=True)
class Largest:
    """Caps on budgets; None is no cap."""

    fill: int | None
    states: int | None
    seconds: float | None
    memory_bytes: int | None


@dataclass(frozen=True)
class Caps:
    """What this server allows."""

    inline_bytes: int
    content_bytes: int
    batch_jobs: int
    batch_bytes: int
    pins: int
    owner: Limits
    default_budget: Budget
    largest_budget: Largest

    @classmethod
    def of(cls, settings: Settings) -> Caps:
        """Return the caps that the settings say."""
        return cls(
            inline_bytes=settings.inline_bytes,
            content_bytes=settings.content_bytes,
            batch_jobs=settings.batch_jobs,
            batch_bytes=settings.batch_bytes,
            pins=settings.pins,
            owner=settings.limits,
            default_budget=settings.default_budget,
            largest_budget=Largest(
                settings.largest_fill, settings.largest_states, settings.largest_seconds, settings.largest_memory
            ),
        )


def refuse(field: str, description: str) -> FieldInvalid:
    """Return the error about one field."""
    return FieldInvalid(FieldViolation(field, description))


def check_request_id(request_id: str, field: str) -> str:
    """Return the id, or raise FieldInvalid."""
    if not _REQUEST_ID.fullmatch(request_id):
        raise refuse(field, "must be 1 to 64 characters of A-Z, a-z, 0-9, _ and -; choose a fresh one for each request")
    return request_id


def check_address(address: str, field: str) -> str:
    """Return the address, or raise FieldInvalid."""
    if not _ADDRESS.fullmatch(address):
        raise refuse(field, "is no address: give the SHA-256 of the content as 64 lower-case hexadecimal digits")
    return address


def label_fault(label: str) -> str | None:
    """Return what is wrong with a label, if anything."""
    if len(label) > LABEL_CHARACTERS:
        return f"has {len(label)} characters; shorten it to {LABEL_CHARACTERS}"
    for character in label:
        if ord(character) < 0x20 or 0x7F <= ord(character) < 0xA0:
            return f"holds the control character U+{ord(character):04X}; remove it"
    return None


def check_label(label: str, field: str) -> str:
    """Return the label, or raise FieldInvalid."""
    fault = label_fault(label)
    if fault is not None:
        raise refuse(field, fault)
    return label


def check_piece(piece: bytes | memoryview, field: str) -> None:
    """Raise QuotaExceeded for a piece that is too large."""
    if len(piece) > PIECE_BYTES:
        raise QuotaExceeded(field, f"has {len(piece)} bytes; send pieces of at most {PIECE_BYTES}", None)


def check_inline(total: int, caps: Caps, field: str) -> None:
    """Raise QuotaExceeded when a job carries too many bytes."""
    if total > caps.inline_bytes:
        raise QuotaExceeded(
            field,
            f"carries {total} bytes of content inline, where {caps.inline_bytes} are allowed; "
            "store it by StoreContent and name its address",
            None,
        )


def check_batch(jobs: int, carried: int, caps: Caps) -> None:
    """Raise QuotaExceeded when a batch has too many jobs or carries too many bytes."""
    if jobs > caps.batch_jobs:
        raise QuotaExceeded("specs", f"more than {caps.batch_jobs} jobs in one batch; split it", None)
    if carried > caps.batch_bytes:
        raise QuotaExceeded(
            "specs",
            f"more than {caps.batch_bytes} bytes in one batch; store content by StoreContent and name its address, "
            "or split the batch",
            None,
        )


def check_content_size(size_bytes: int, caps: Caps, field: str) -> int:
    """Return the announced size, or raise FieldInvalid or QuotaExceeded."""
    if size_bytes < 0:
        raise refuse(field, f"is {size_bytes}; give the length of all bytes, at least 0")
    if size_bytes > caps.content_bytes:
        raise QuotaExceeded(field, f"{size_bytes} bytes are more than the {caps.content_bytes} of this server", None)
    return size_bytes
