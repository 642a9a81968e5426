"""Messages of an upload as they go onto the wire.

A piece is up to a megabyte, which a message would copy twice more. So pieces are written as the bytes of their message
at once: one field, its length and its bytes.
"""

from __future__ import annotations

from google.protobuf.message import Message

from nearchord.v1 import graph_service_pb2

TAG = graph_service_pb2.StoreContentRequest.PIECE_FIELD_NUMBER << 3 | 2


def piece_message(piece: memoryview) -> bytes:
    """The bytes of StoreContentRequest(piece=piece)."""
    prefix, length = bytearray((TAG,)), piece.nbytes
    while length > 0x7F:
        prefix.append(length & 0x7F | 0x80)
        length >>= 7
    prefix.append(length)
    return b"".join((prefix, piece))


def serialized(message: Message | bytes) -> bytes:
    """The bytes of a message that may be written already."""
    return message if isinstance(message, bytes) else message.SerializeToString()
