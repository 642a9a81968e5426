"""Flows that store and read content."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from google.protobuf.message import Message

from nearchord.errors import NearchordError
from nearchord.graph import Graph
from nearchord.jobs import Addresses
from nearchord.load import ServerInfo
from nearchord.session import replies
from nearchord.session.caller import Caller
from nearchord.session.content import Content, InputContent, content_of
from nearchord.session.retry import Retry
from nearchord.session.steps import Call, Flow, Method, Now, Pause, Send
from nearchord.v1 import graph_service_pb2, load_service_pb2

PIECE_BYTES = 1 << 20


def server(caller: Caller) -> Flow[ServerInfo]:
    """What the server is; remembered as its caps."""
    reply = yield Call(Method.GET_SERVER, load_service_pb2.GetServerRequest())
    caller.caps = replies.server_info(reply)
    return caller.caps


def caps(caller: Caller) -> Flow[ServerInfo]:
    """The server's caps, asked for once in a session."""
    if caller.caps is not None:
        return caller.caps
    return (yield from server(caller))


def upload(caller: Caller, graph: Graph) -> Flow[Addresses]:
    """Stores a graph with its weights and names."""
    return (yield from store_all(caller, content_of(graph)))


def store_all(caller: Caller, content: InputContent) -> Flow[Addresses]:
    """Stores all content of one job that is not known to be stored."""
    for part in content.present:
        if part.address not in caller.stored:
            yield from store(caller, part)
            caller.stored.add(part.address)
    return Addresses(
        content.graph.address,
        "" if content.weights is None else content.weights.address,
        "" if content.names is None else content.names.address,
    )


def store(caller: Caller, content: Content) -> Flow[None]:
    """Stores one piece of content, going on after a break where the server has got to."""
    piece_bytes = min((yield from caps(caller)).piece_bytes or PIECE_BYTES, PIECE_BYTES)
    retry = Retry(caller.patience, (yield Now()))
    committed = -1
    while True:
        try:
            reply = yield Call(Method.GET_UPLOAD, graph_service_pb2.GetUploadRequest(address=content.address))
            if reply.stored:
                return
            if reply.committed_bytes > committed:
                committed = reply.committed_bytes
                retry.sign_of_life((yield Now()))
            yield Send(Method.STORE_CONTENT, upload_stream(content, reply.committed_bytes, piece_bytes))
            return
        except NearchordError as error:
            yield Pause(retry.pause_after(error, (yield Now())))


def upload_stream(content: Content, offset: int, piece_bytes: int) -> Callable[[], Iterator[Message]]:
    """The messages of one upload stream that begins at `offset`."""

    def messages() -> Iterator[Message]:
        yield graph_service_pb2.StoreContentRequest(
            opening=graph_service_pb2.UploadOpening(
                kind=content.kind, address=content.address, size_bytes=content.size, offset=offset
            )
        )
        for piece in content.pieces(offset, piece_bytes):
            yield graph_service_pb2.StoreContentRequest(piece=piece)

    return messages


def delete_content(caller: Caller, address: str) -> Flow[None]:
    """Forgets stored content."""
    caller.stored.discard(address)
    yield Call(Method.DELETE_CONTENT, graph_service_pb2.DeleteContentRequest(address=address))
