"""Messages of an upload as they come off the wire.

A piece is up to a megabyte, which parsing would copy twice. So a message that holds nothing but a piece is not parsed:
the piece stays where it was received.
"""

from __future__ import annotations

from nearchord.v1 import graph_service_pb2 as pb

Received = pb.StoreContentRequest | memoryview

_TAG = pb.StoreContentRequest.PIECE_FIELD_NUMBER << 3 | 2
_LENGTH_BYTES = 4
"""Seven bits each: enough for any message that is let in."""


def read(data: bytes) -> Received:
    """Return the piece of a message that holds just this field, once; any other message parsed."""
    begin = _begin(data)
    return memoryview(data)[begin:] if begin else pb.StoreContentRequest.FromString(data)


def opening_of(message: Received | None) -> pb.UploadOpening | None:
    """Return the opening that a message holds, if any."""
    if isinstance(message, pb.StoreContentRequest) and message.WhichOneof("part") == "opening":
        return message.opening
    return None


def piece_of(message: Received) -> bytes | memoryview | None:
    """Return the piece that a message holds, if any."""
    if isinstance(message, memoryview):
        return message
    return message.piece if message.WhichOneof("part") == "piece" else None


def _begin(data: bytes) -> int:
    """Return where the piece begins that reaches to the end of the message, 0 when this is not so."""
    if data[:1] != bytes((_TAG,)):
        return 0
    length = 0
    for digit, byte in enumerate(data[1 : 1 + _LENGTH_BYTES]):
        length |= (byte & 0x7F) << 7 * digit
        if byte < 0x80:
            begin = 2 + digit
            return begin if begin + length == len(data) else 0
    return 0
