"""Flows that store and read content."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

from google.protobuf.message import Message

from nearchord.errors import NearchordError
from nearchord.graph import Graph
from nearchord.jobs import Addresses
from nearchord.load import ServerInfo
from nearchord.session import replies
from nearchord.session.caller import Caller
from nearchord.session.content import Content, InputContent, content_of
from nearchord.session.retry import Retry
from nearchord.session.steps import Call, Finish, Flow, Method, Now, Pause, Start
from nearchord.session.wire import piece_message
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
    """Stores all content of one job that is not known to be stored, in streams side by side.

    What is small begins, so that it travels while the address of the rest is computed.
    """
    under_way = []
    for part in sorted(content.present, key=lambda part: part.size):
        if part.address not in caller.stored:
            storing = Storing(part, (yield from caps(caller)), Retry(caller.patience, (yield Now())))
            yield from storing.begin()
            under_way.append(storing)
    for storing in under_way:
        yield from storing.end()
        caller.stored.add(storing.content.address)
    return Addresses(
        "" if content.graph is None else content.graph.address,
        "" if content.weights is None else content.weights.address,
        "" if content.names is None else content.names.address,
    )


class Storing:
    """One piece of content on its way to a server."""

    def __init__(self, content: Content, server: ServerInfo, retry: Retry) -> None:
        self.content = content
        self._piece_bytes = min(server.piece_bytes or PIECE_BYTES, PIECE_BYTES)
        self._retry = retry
        self._committed = -1
        self._stream: Any = None
        self._failure: NearchordError | None = None

    def begin(self) -> Flow[None]:
        """Starts to send what the server lacks, if anything; `end` deals with what prevents it."""
        self._stream = self._failure = None
        try:
            reply = yield Call(Method.GET_UPLOAD, graph_service_pb2.GetUploadRequest(address=self.content.address))
            if reply.stored:
                return
            if reply.committed_bytes > self._committed:
                self._committed = reply.committed_bytes
                self._retry.sign_of_life((yield Now()))
            messages = upload_stream(self.content, reply.committed_bytes, self._piece_bytes)
            self._stream = yield Start(Method.STORE_CONTENT, messages)
        except NearchordError as error:
            self._failure = error

    def end(self) -> Flow[None]:
        """Waits until the content is stored; after a break goes on where the server has got to."""
        while True:
            try:
                if self._failure is not None:
                    raise self._failure
                if self._stream is not None:
                    yield Finish(self._stream)
                return
            except NearchordError as error:
                yield Pause(self._retry.pause_after(error, (yield Now())))
            yield from self.begin()


def upload_stream(content: Content, offset: int, piece_bytes: int) -> Callable[[], Iterator[Message | bytes]]:
    """The messages of one upload stream that begins at `offset`."""

    def messages() -> Iterator[Message | bytes]:
        yield graph_service_pb2.StoreContentRequest(
            opening=graph_service_pb2.UploadOpening(
                kind=content.kind, address=content.address, size_bytes=content.size, offset=offset
            )
        )
        for piece in content.pieces(offset, piece_bytes):
            yield piece_message(piece)

    return messages


def delete_content(caller: Caller, address: str) -> Flow[None]:
    """Forgets stored content."""
    caller.stored.discard(address)
    yield Call(Method.DELETE_CONTENT, graph_service_pb2.DeleteContentRequest(address=address))
