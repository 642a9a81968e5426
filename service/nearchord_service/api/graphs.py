"""GraphService: storing graphs, weights and names, and giving them back."""

# ruff: noqa: N802 (methods carry the names of the contract)
from __future__ import annotations

from collections.abc import AsyncIterator
from functools import partial
from typing import BinaryIO

from nearchord.v1 import graph_service_pb2 as pb
from nearchord.v1 import graph_service_pb2_grpc

from nearchord_service.api import canonical, pieces
from nearchord_service.api.auth import Context, owner
from nearchord_service.api.calls import Calls
from nearchord_service.api.convert.content import from_content, to_kind
from nearchord_service.api.limits import PIECE_BYTES, Caps, check_address, check_content_size, check_piece, refuse
from nearchord_service.api.uploads import Uploads
from nearchord_service.metrics import Metrics
from nearchord_service.model.content import Bytes, Content
from nearchord_service.store.port import Store

PIECE_FIELD = "piece"


class GraphServicer(graph_service_pb2_grpc.GraphServiceServicer):
    """Content of one owner at a time, checked on arrival."""

    def __init__(self, store: Store, calls: Calls, caps: Caps, metrics: Metrics) -> None:
        self._store = store
        self._calls = calls
        self._caps = caps
        self._uploads = Uploads(calls, metrics.upload_bytes)

    async def StoreContent(self, requests: AsyncIterator[pieces.Received], context: Context) -> pb.StoreContentResponse:
        """Take an upload in; what was received before a break stays for a later call."""
        opening = pieces.opening_of(await anext(requests, None))
        if opening is None:
            raise refuse("opening", "is missing: the first message of an upload is its opening")
        kind = to_kind(opening.kind, "opening.kind")
        address = check_address(opening.address, "opening.address")
        size = check_content_size(opening.size_bytes, self._caps, "opening.size_bytes")
        offset = opening.offset
        if not 0 <= offset <= size:
            raise refuse("opening.offset", f"is {offset}; it must be from 0 to size_bytes = {size}")
        begin = partial(self._store.begin_upload, owner(context), address, kind, size, offset, self._caps.owner)
        held = await self._uploads.begin(begin)
        if isinstance(held, Content):
            return pb.StoreContentResponse(content=from_content(held))
        try:
            async for request in requests:
                piece = pieces.piece_of(request)
                if piece is None:
                    raise refuse(PIECE_FIELD, "is missing: after the opening an upload has only pieces")
                check_piece(piece, PIECE_FIELD)
                await held.take(piece)
            content = await held.publish(lambda data: canonical.check(kind, data, PIECE_FIELD))
        finally:
            self._uploads.let_go(held)
        return pb.StoreContentResponse(content=from_content(content))

    async def settle(self) -> None:
        """Wait until every upload that ended is let go."""
        await self._uploads.settle()

    async def GetUpload(self, request: pb.GetUploadRequest, context: Context) -> pb.GetUploadResponse:
        """Say how far an upload has come."""
        address = check_address(request.address, "address")
        committed, stored = await self._calls.quick(self._store.upload_state, owner(context), address)
        return pb.GetUploadResponse(committed_bytes=committed, stored=stored)

    async def GetContent(self, request: pb.GetContentRequest, context: Context) -> pb.GetContentResponse:
        """Describe content."""
        address = check_address(request.address, "address")
        content = await self._calls.quick(self._store.content, owner(context), address)
        return pb.GetContentResponse(content=from_content(content))

    async def ReadContent(self, request: pb.ReadContentRequest, context: Context) -> None:
        """Stream the bytes of content."""
        address = check_address(request.address, "address")
        content = await self._calls.quick(self._store.content, owner(context), address)
        if not 0 <= request.offset <= content.size_bytes:
            raise refuse("offset", f"is {request.offset}; it must be from 0 to size_bytes = {content.size_bytes}")
        place = await self._calls.quick(self._store.content_bytes, owner(context), address)
        source = await self._calls.heavy(ContentReader, place, request.offset)
        try:
            while piece := await self._calls.heavy(source.next_piece):
                await context.write(pb.ReadContentResponse(piece=piece))
        finally:
            source.close()

    async def DeleteContent(self, request: pb.DeleteContentRequest, context: Context) -> pb.DeleteContentResponse:
        """Forget content."""
        address = check_address(request.address, "address")
        await self._calls.quick(self._store.delete_content, owner(context), address)
        return pb.DeleteContentResponse()


class ContentReader:
    """Reads stored content piece by piece. Blocking, one thread at a time."""

    def __init__(self, place: Bytes, offset: int) -> None:
        self._data = place.data
        self._file: BinaryIO | None = None
        if place.data is None:
            assert place.path is not None, "content is in memory or in a file"
            self._file = place.path.open("rb")
            self._file.seek(offset)
        self._offset = offset

    def next_piece(self) -> bytes:
        """Return the next bytes, none at the end."""
        if self._file is not None:
            return self._file.read(PIECE_BYTES)
        assert self._data is not None, "content is in memory or in a file"
        piece = self._data[self._offset : self._offset + PIECE_BYTES]
        self._offset += len(piece)
        return piece

    def close(self) -> None:
        """Close the file. Safe to repeat."""
        if self._file is not None:
            self._file.close()
