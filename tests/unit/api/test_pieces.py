"""Messages of an upload, read with and without parsing."""

from __future__ import annotations

import pytest
from google.protobuf.message import DecodeError
from hypothesis import given
from hypothesis import strategies as st
from nearchord.v1 import graph_service_pb2 as pb
from nearchord_service.api import pieces

OPENING = pb.StoreContentRequest(opening=pb.UploadOpening(address="a", offset=7))


@given(st.integers(0, 300) | st.sampled_from([16_383, 16_384, 2**20]))
def test_a_piece_stays_where_it_was_received(length: int) -> None:
    message = pb.StoreContentRequest(piece=b"\x12" * length).SerializeToString()
    read = pieces.read(message)
    assert isinstance(read, memoryview)
    assert read.obj is message
    assert pieces.piece_of(read) == b"\x12" * length
    assert pieces.opening_of(read) is None


def test_an_opening_is_parsed() -> None:
    read = pieces.read(OPENING.SerializeToString())
    assert pieces.opening_of(read) == OPENING.opening
    assert pieces.piece_of(read) is None


@pytest.mark.parametrize("nothing", [pieces.read(b""), None])
def test_an_empty_message_holds_nothing(nothing: pieces.Received | None) -> None:
    assert pieces.opening_of(nothing) is None
    assert nothing is None or pieces.piece_of(nothing) is None


one_field = st.one_of(
    st.binary(max_size=4).map(lambda data: pb.StoreContentRequest(piece=data).SerializeToString()),
    st.just(OPENING.SerializeToString()),
    st.just(b"\x12\x81\x00x"),  # a length of more digits than it needs
    st.just(b"\x1a\x01x"),  # a field of a later version
)


@given(st.lists(one_field, max_size=3).map(b"".join) | st.binary(max_size=6).map(lambda rest: b"\x12" + rest))
def test_every_message_reads_as_if_parsed(data: bytes) -> None:
    """Several fields in one message, and bytes that are no message, included."""
    try:
        parsed = pb.StoreContentRequest.FromString(data)
    except DecodeError:
        with pytest.raises(DecodeError):
            pieces.read(data)
        return
    read = pieces.read(data)
    assert pieces.piece_of(read) == pieces.piece_of(parsed)
    assert pieces.opening_of(read) == pieces.opening_of(parsed)
