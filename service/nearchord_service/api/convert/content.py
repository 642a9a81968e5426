"""Content: addresses of what travels inline, descriptions of what is stored."""

from __future__ import annotations

import hashlib

from nearchord.v1 import content_pb2

from nearchord_service.api import canonical
from nearchord_service.api.convert.enums import CONTENT_KINDS, CONTENT_KINDS_BY_NUMBER
from nearchord_service.api.convert.times import to_timestamp
from nearchord_service.api.limits import refuse
from nearchord_service.model.content import Content, ContentKind, NewContent


def address_of(data: bytes) -> str:
    """Return the address of bytes."""
    return hashlib.sha256(data).hexdigest()


def to_new_content(kind: ContentKind, data: bytes, field: str, address: str) -> NewContent:
    """Check inline bytes that have this address; raises ContentInvalid naming `field`."""
    vertices, edges = canonical.check(kind, data, field)
    return NewContent(address, kind, data, vertices, edges)


def to_kind(number: content_pb2.ContentKind, field: str) -> ContentKind:
    """Read a kind; raises FieldInvalid."""
    kind = CONTENT_KINDS_BY_NUMBER.get(number)
    if kind is None:
        raise refuse(field, f"is {number}, which is no kind of content; say GRAPH, WEIGHTS or NAMES")
    return kind


def from_content(content: Content) -> content_pb2.Content:
    """Write a description."""
    return content_pb2.Content(
        address=content.address,
        kind=CONTENT_KINDS[content.kind],
        size_bytes=content.size_bytes,
        vertices=content.vertices,
        edges=content.edges,
        created_at=to_timestamp(content.created_at),
    )
