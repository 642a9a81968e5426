"""Pieces of an upload are written as the message that the contract describes."""

from __future__ import annotations

import pytest
from nearchord.session import wire
from nearchord.v1 import graph_service_pb2


@pytest.mark.parametrize("length", [0, 1, 127, 128, 16_383, 16_384, 2**20, 2**21 + 1])
def test_a_piece_is_written_as_its_message(length):
    """Byte for byte, at every number of length digits."""
    piece = bytes(range(256)) * (length // 256 + 1)
    message = graph_service_pb2.StoreContentRequest(piece=piece[:length])
    assert wire.piece_message(memoryview(piece)[:length]) == message.SerializeToString()
    assert wire.serialized(message) == wire.serialized(message.SerializeToString()) == message.SerializeToString()
