"""GraphService: what is stored, what is refused, how a broken upload goes on."""

from __future__ import annotations

import hashlib
import struct
import threading
from collections.abc import Callable, Iterator

import pytest
from nearchord.v1 import content_pb2
from nearchord.v1 import graph_service_pb2 as pb
from nearchord_service.api.convert.content import address_of
from unit.api.serving import (
    DEADLINE,
    PATH,
    TRIANGLE,
    Failure,
    Serving,
    a_big_graph,
    a_spec,
    attempt,
    failure,
    uploading,
    wait_until,
)

UNKNOWN = "0f" * 32


def test_a_stored_graph_can_be_described_and_read_back(served: Serving) -> None:
    data = a_big_graph(200_000)
    content = served.upload(data)
    assert content.address == hashlib.sha256(data).hexdigest()
    assert (content.kind, content.size_bytes) == (content_pb2.CONTENT_KIND_GRAPH, len(data))
    assert (content.vertices, content.edges) == (200_000, 199_999)
    assert served.graphs.GetContent(pb.GetContentRequest(address=content.address)).content == content
    for offset in (0, 1_234_567, len(data)):
        request = pb.ReadContentRequest(address=content.address, offset=offset)
        pieces = [response.piece for response in served.graphs.ReadContent(request)]
        assert b"".join(pieces) == data[offset:]
        assert all(0 < len(piece) <= 2**20 for piece in pieces)


@pytest.mark.parametrize(
    ("data", "kind", "vertices"),
    [
        (struct.pack("<2q", 5, 0), content_pb2.CONTENT_KIND_WEIGHTS, 2),
        ("north\nsüd\n\n".encode(), content_pb2.CONTENT_KIND_NAMES, 3),
        (b"", content_pb2.CONTENT_KIND_WEIGHTS, 0),
        (struct.pack("<IQQ", 0, 0, 0), content_pb2.CONTENT_KIND_GRAPH, 0),
        (struct.pack("<IQ2Q", 1, 0, 0, 0), content_pb2.CONTENT_KIND_GRAPH, 1),
        (struct.pack("<IQ", 200_000, 0) + bytes(8 * 200_001), content_pb2.CONTENT_KIND_GRAPH, 200_000),
    ],
)
def test_every_kind_of_content_is_stored(
    served: Serving, data: bytes, kind: content_pb2.ContentKind, vertices: int
) -> None:
    content = served.upload(data, kind)
    assert (content.kind, content.vertices, content.edges) == (kind, vertices, 0)


def test_storing_again_needs_no_pieces(served: Serving) -> None:
    """The answer comes at once; the stream of a caller that keeps sending is not waited for."""
    content = served.upload(TRIANGLE)
    opening = next(uploading(TRIANGLE))
    assert served.graphs.StoreContent(iter([opening])).content == content
    state = served.graphs.GetUpload(pb.GetUploadRequest(address=content.address))
    assert state.stored


GRAPH = content_pb2.CONTENT_KIND_GRAPH
WEIGHTS = content_pb2.CONTENT_KIND_WEIGHTS
NAMES = content_pb2.CONTENT_KIND_NAMES
INVALID = ("INVALID_ARGUMENT", "CONTENT_INVALID")


def graph(n: int, m: int, pointers: tuple[int, ...], targets: tuple[int, ...]) -> bytes:
    return struct.pack(f"<IQ{len(pointers)}Q{len(targets)}I", n, m, *pointers, *targets)


@pytest.mark.parametrize(
    ("kind", "data", "description"),
    [
        (GRAPH, graph(2, 1, (0, 1, 1), (0,)), "row 0 names vertex 0 itself: a self-loop; drop it"),
        (GRAPH, graph(2, 2, (0, 2, 2), (1, 1)), "row 0 names vertex 1 twice: a repeated edge; drop it"),
        (GRAPH, graph(2, 1, (0, 1, 1), (2,)), "row 0 names vertex 2, but n = 2: vertices are numbered from 0 to 1"),
        (
            GRAPH,
            graph(2, 2, (0, 1, 1), (1,)),
            "announces n = 2 and m = 2, which take 44 bytes, but has 40; "
            "send n + 1 row pointers, m targets and nothing else",
        ),
        (GRAPH, graph(2, 1, (0, 0, 0), (1,)), "row pointer 2 (the last) is 0, but m = 1 edges are announced"),
        (WEIGHTS, struct.pack("<2q", 1, -1), "vertex 1 weighs -1; weights are at least 0"),
        (
            WEIGHTS,
            struct.pack("<2q", 2**61, 2**61),
            "the weights up to vertex 1 add up to 2^62 or more; scale them so that their sum stays below",
        ),
        (NAMES, b"a\n\xff\n", "name 1 is not UTF-8: invalid start byte; encode names as UTF-8"),
    ],
)
def test_content_out_of_form_is_refused_and_forgotten(
    served: Serving, kind: content_pb2.ContentKind, data: bytes, description: str
) -> None:
    found = failure(lambda: served.upload(data, kind))
    assert found.summary == INVALID
    assert found.fields == (("piece", description),)
    state = served.graphs.GetUpload(pb.GetUploadRequest(address=address_of(data)))
    assert (state.committed_bytes, state.stored) == (0, False)


def test_a_wrong_digest_is_refused_and_forgotten(served: Serving) -> None:
    found = failure(lambda: served.graphs.StoreContent(uploading(TRIANGLE, address=UNKNOWN)))
    assert found.summary == ("INVALID_ARGUMENT", "DIGEST_MISMATCH")
    assert found.fields[0][0] == "opening.address"
    assert address_of(TRIANGLE) in found.message
    assert "upload again from offset 0" in found.message
    assert served.graphs.GetUpload(pb.GetUploadRequest(address=UNKNOWN)).committed_bytes == 0


def test_fewer_bytes_than_announced_are_refused(served: Serving) -> None:
    found = failure(lambda: served.graphs.StoreContent(uploading(TRIANGLE, size=len(TRIANGLE) + 1)))
    assert found.summary == INVALID
    assert found.fields[0][0] == "piece"


def test_more_bytes_than_announced_are_refused(served: Serving) -> None:
    found = failure(lambda: served.graphs.StoreContent(uploading(TRIANGLE, size=len(TRIANGLE) - 1)))
    assert found.summary == INVALID
    assert found.fields[0][0] == "piece"


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"kind": content_pb2.CONTENT_KIND_UNSPECIFIED}, "opening.kind"),
        ({"kind": 77}, "opening.kind"),
        ({"address": "../../etc"}, "opening.address"),
        ({"address": ""}, "opening.address"),
        ({"size": -1}, "opening.size_bytes"),
        ({"offset": -1}, "opening.offset"),
        ({"offset": 10_000}, "opening.offset"),
    ],
)
def test_a_wrong_opening_is_named(served: Serving, change: dict[str, object], field: str) -> None:
    (opening, *_) = uploading(TRIANGLE, **change)  # type: ignore[arg-type]
    found = failure(lambda: served.graphs.StoreContent(iter([opening])))
    assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
    assert [name for name, _ in found.fields] == [field]


def test_an_upload_begins_with_its_opening(served: Serving) -> None:
    (opening, piece) = uploading(TRIANGLE)
    for messages in ([], [piece], [pb.StoreContentRequest()]):
        found = failure(lambda messages=messages: served.graphs.StoreContent(iter(messages)))
        assert found.fields == (("opening", "is missing: the first message of an upload is its opening"),)
    found = failure(lambda: served.graphs.StoreContent(iter([opening, opening])))
    assert found.fields == (("piece", "is missing: after the opening an upload has only pieces"),)


def test_content_beyond_the_cap_is_a_quota(served: Serving) -> None:
    (opening, *_) = uploading(TRIANGLE, size=2**24 + 1)
    found = failure(lambda: served.graphs.StoreContent(iter([opening])))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")
    assert found.others == ("opening.size_bytes",)
    assert found.retry_seconds is None


def test_stored_bytes_have_a_quota(serve: Callable[..., Serving]) -> None:
    served = serve(stored_bytes=len(TRIANGLE))
    served.upload(TRIANGLE)
    found = failure(lambda: served.upload(PATH))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")


def test_a_piece_beyond_the_cap_is_a_quota(served: Serving) -> None:
    data = bytes(2**20 + 1)
    found = failure(lambda: served.graphs.StoreContent(uploading(data, piece=2**21)))
    assert found.summary == ("RESOURCE_EXHAUSTED", "QUOTA_EXCEEDED")
    assert found.others == ("piece",)


class Broken:
    """An upload whose caller sends some pieces and stays away."""

    def __init__(self, served: Serving, data: bytes, pieces: int) -> None:
        self._served = served
        self._messages = list(uploading(data))[: 1 + pieces]
        self._address = address_of(data)
        self._leave = threading.Event()
        self._call = served.graphs.StoreContent.future(self._stream())
        self._wanted = pieces * 2**20

    def _stream(self) -> Iterator[pb.StoreContentRequest]:
        yield from self._messages
        self._leave.wait(DEADLINE)

    def arrived(self) -> None:
        wait_until(lambda: self.committed() == self._wanted)

    def committed(self) -> int:
        return self._served.graphs.GetUpload(pb.GetUploadRequest(address=self._address)).committed_bytes

    def leave(self) -> None:
        self._call.cancel()
        self._leave.set()


def test_a_broken_upload_goes_on_where_it_stood(served: Serving) -> None:
    data = a_big_graph(300_000)
    broken = Broken(served, data, pieces=2)
    broken.arrived()
    broken.leave()

    found: list[Failure | content_pb2.Content] = []

    def resumed() -> bool:
        """The broken call lets go in its own time; until then the upload is busy."""
        found[:] = [attempt(lambda: served.graphs.StoreContent(uploading(data, offset=broken.committed())).content)]
        return not (isinstance(found[0], Failure) and found[0].summary == ("ABORTED", "UPLOAD_BUSY"))

    wait_until(resumed)
    (content,) = found
    assert isinstance(content, content_pb2.Content)
    assert (content.address, content.edges) == (address_of(data), 299_999)


def test_an_upload_has_one_writer(served: Serving) -> None:
    data = a_big_graph(300_000)
    broken = Broken(served, data, pieces=2)
    broken.arrived()
    found = failure(lambda: served.graphs.StoreContent(uploading(data, offset=2**21)))
    broken.leave()
    assert found.summary == ("ABORTED", "UPLOAD_BUSY")
    assert found.retry_seconds == 1.0


def test_a_wrong_offset_is_told_the_committed_one(served: Serving) -> None:
    data = a_big_graph(300_000)
    found = failure(lambda: served.graphs.StoreContent(uploading(data, offset=2**20)))
    assert found.summary == ("FAILED_PRECONDITION", "UPLOAD_OFFSET")
    assert found.metadata == {"committed_bytes": "0"}
    assert found.others == (address_of(data),)


def test_unknown_content_is_not_found(served: Serving) -> None:
    for call in (
        lambda: served.graphs.GetContent(pb.GetContentRequest(address=UNKNOWN)),
        lambda: served.graphs.ReadContent(pb.ReadContentRequest(address=UNKNOWN)),
        lambda: served.graphs.DeleteContent(pb.DeleteContentRequest(address=UNKNOWN)),
    ):
        found = failure(call)
        assert found.summary == ("NOT_FOUND", "CONTENT_UNKNOWN")
        assert found.others == (f"content {UNKNOWN}",)
    assert served.graphs.GetUpload(pb.GetUploadRequest(address=UNKNOWN)) == pb.GetUploadResponse()


def test_an_address_has_to_be_one(served: Serving) -> None:
    for call in (
        lambda: served.graphs.GetUpload(pb.GetUploadRequest(address="..")),
        lambda: served.graphs.GetContent(pb.GetContentRequest(address="AB" * 32)),
        lambda: served.graphs.ReadContent(pb.ReadContentRequest(address="")),
        lambda: served.graphs.DeleteContent(pb.DeleteContentRequest(address="0" * 63)),
    ):
        found = failure(call)
        assert found.summary == ("INVALID_ARGUMENT", "FIELD_INVALID")
        assert found.fields[0][0] == "address"


@pytest.mark.parametrize("offset", [-1, len(TRIANGLE) + 1])
def test_reading_begins_within_the_content(served: Serving, offset: int) -> None:
    address = served.upload(TRIANGLE).address
    found = failure(lambda: served.graphs.ReadContent(pb.ReadContentRequest(address=address, offset=offset)))
    assert found.fields == (("offset", f"is {offset}; it must be from 0 to size_bytes = {len(TRIANGLE)}"),)


def test_content_is_deleted_once_nothing_needs_it(served: Serving) -> None:
    address = served.upload(TRIANGLE).address
    served.submit(a_spec(input=content_pb2.GraphInput(graph_address=address)))
    found = failure(lambda: served.graphs.DeleteContent(pb.DeleteContentRequest(address=address)))
    assert found.summary == ("FAILED_PRECONDITION", "CONTENT_IN_USE")
    (lease,) = served.claim()
    served.finish(lease)
    served.graphs.DeleteContent(pb.DeleteContentRequest(address=address))
    assert failure(lambda: served.graphs.GetContent(pb.GetContentRequest(address=address))).code == "NOT_FOUND"


def test_received_bytes_are_counted(served: Serving) -> None:
    data = a_big_graph(100_000)
    served.upload(data)
    assert served.metrics.registry.get_sample_value("nearchord_upload_bytes_total") == len(data)
