"""Content: uploads that go on, addresses that are checked, owners who see only what is theirs."""

from __future__ import annotations

import hashlib
import os

import pytest
from contract.stores import (
    ANN,
    BEN,
    LIMITS,
    Home,
    accept_all,
    answer,
    begin,
    claim_one,
    finish,
    graph,
    names,
    put,
    spec,
    submit,
    weights,
)
from nearchord_service.model.content import Content, ContentKind
from nearchord_service.model.errors import (
    ContentInUse,
    ContentInvalid,
    ContentUnknown,
    DigestMismatch,
    FieldInvalid,
    FieldViolation,
    QuotaExceeded,
    UploadBusy,
    UploadOffset,
)
from nearchord_service.store.port import Limits, Store

SMALL = graph(1).data
LARGE = graph(2, padding=3 << 20).data


def address_of(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def read(store: Store, owner: str, address: str) -> bytes:
    place = store.content_bytes(owner, address)
    if place.data is not None:
        return place.data
    assert place.path is not None
    return place.path.read_bytes()


@pytest.mark.parametrize("data", [b"", SMALL, LARGE], ids=["empty", "small", "large"])
def test_published_content_is_visible_and_whole(home: Home, data: bytes) -> None:
    store = home.open()
    upload = begin(store, data)
    for at in range(0, len(data), 1 << 20):
        upload.write(data[at : at + (1 << 20)])
    assert store.upload_state(ANN, address_of(data)) == (len(data), False)
    with pytest.raises(ContentUnknown):
        store.content(ANN, address_of(data))
    seen = []

    def check(view: memoryview) -> tuple[int, int]:
        assert view.readonly
        seen.append(bytes(view))
        return 11, 12

    published = upload.publish(check)
    upload.release()
    assert seen == [data]
    assert published == Content(ANN, address_of(data), ContentKind.GRAPH, len(data), 11, 12, home.clock.now)
    for source in (lambda: store, home.open):
        opened = source()
        assert opened.content(ANN, address_of(data)) == published
        assert read(opened, ANN, address_of(data)) == data
        assert opened.upload_state(ANN, address_of(data)) == (0, True)


@pytest.mark.parametrize("data", [SMALL, LARGE], ids=["small", "large"])
def test_broken_upload_goes_on_after_a_restart(home: Home, data: bytes) -> None:
    upload = begin(home.open(), data)
    upload.write(data[:15])
    upload.release()
    upload.release()
    store = home.open()
    assert store.upload_state(ANN, address_of(data)) == (15, False)
    upload = begin(store, data, offset=15)
    assert upload.committed == 15
    upload.write(data[15:])
    upload.publish(accept_all)
    upload.release()
    assert read(store, ANN, address_of(data)) == data


def test_upload_goes_on_only_at_its_committed_offset(home: Home) -> None:
    store = home.open()
    upload = begin(store, LARGE)
    upload.write(LARGE[:100])
    upload.release()
    for offset in (1, 99, 101):
        with pytest.raises(UploadOffset) as caught:
            begin(store, LARGE, offset=offset)
        assert caught.value.committed == 100
    assert begin(store, LARGE, offset=100).committed == 100


def test_upload_from_offset_zero_begins_anew(home: Home) -> None:
    """Also under another length: what was begun wrongly blocks nobody."""
    store = home.open()
    upload = store.begin_upload(ANN, address_of(SMALL), ContentKind.NAMES, 7, 0, LIMITS)
    assert not isinstance(upload, Content)
    upload.write(b"wrong")
    upload.release()
    with pytest.raises(FieldInvalid, match=r"opening\.kind.*opening\.size_bytes"):
        begin(store, SMALL, offset=5)
    assert put(store, SMALL) == address_of(SMALL)


def test_upload_has_one_writer_at_a_time(home: Home) -> None:
    store = home.open()
    first = begin(store, SMALL)
    with pytest.raises(UploadBusy):
        begin(store, SMALL)
    begin(store, SMALL, owner=BEN).release()
    first.write(SMALL)
    first.release()
    begin(store, SMALL, offset=len(SMALL)).publish(accept_all)


def test_stored_content_needs_no_upload(home: Home) -> None:
    store = home.open()
    put(store, SMALL)
    stored = store.begin_upload(ANN, address_of(SMALL), ContentKind.GRAPH, len(SMALL), 0, Limits(0, 0))
    assert stored == store.content(ANN, address_of(SMALL))
    for kind, size in ((ContentKind.NAMES, len(SMALL)), (ContentKind.GRAPH, 1)):
        with pytest.raises(FieldInvalid, match="stored"):
            store.begin_upload(ANN, address_of(SMALL), kind, size, 0, LIMITS)


def test_wrong_digest_drops_the_upload(home: Home) -> None:
    store = home.open()
    upload = begin(store, LARGE)
    upload.write(LARGE[:-1] + b"x")
    with pytest.raises(DigestMismatch, match="upload again from offset 0"):
        upload.publish(accept_all)
    upload.release()
    assert store.upload_state(ANN, address_of(LARGE)) == (0, False)
    put(store, LARGE)


def test_truncated_upload_is_refused_with_both_lengths(home: Home) -> None:
    store = home.open()
    upload = begin(store, SMALL)
    upload.write(SMALL[:-1])
    with pytest.raises(ContentInvalid, match=f"after {len(SMALL) - 1} of the {len(SMALL)} bytes") as caught:
        upload.publish(accept_all)
    assert caught.value.violations[0].field == "piece"
    assert store.upload_state(ANN, address_of(SMALL)) == (0, False)


def test_too_many_bytes_are_refused(home: Home) -> None:
    store = home.open()
    upload = begin(store, SMALL)
    upload.write(SMALL)
    with pytest.raises(ContentInvalid, match="more bytes than"):
        upload.write(b"x")
    upload.release()
    assert store.upload_state(ANN, address_of(SMALL)) == (0, False)


def test_malformed_content_drops_the_upload(home: Home) -> None:
    store = home.open()
    upload = begin(store, SMALL)
    upload.write(SMALL)

    def refuse(view: memoryview) -> tuple[int, int]:
        raise ContentInvalid(FieldViolation("piece", f"row 3 of {len(view)} is wrong"))

    with pytest.raises(ContentInvalid, match="row 3"):
        upload.publish(refuse)
    upload.release()
    assert store.upload_state(ANN, address_of(SMALL)) == (0, False)
    with pytest.raises(ContentUnknown):
        store.content(ANN, address_of(SMALL))


def test_uploads_under_way_count_against_the_quota(home: Home) -> None:
    store = home.open()
    limits = Limits(10, len(SMALL) + len(LARGE) - 1)
    first = store.begin_upload(ANN, address_of(LARGE), ContentKind.GRAPH, len(LARGE), 0, limits)
    assert not isinstance(first, Content)
    with pytest.raises(QuotaExceeded, match="stored content"):
        store.begin_upload(ANN, address_of(SMALL), ContentKind.GRAPH, len(SMALL), 0, limits)
    first.release()
    second = store.begin_upload(ANN, address_of(SMALL), ContentKind.GRAPH, len(SMALL), 0, limits)
    assert not isinstance(second, Content)
    second.write(SMALL)
    second.publish(accept_all)
    with pytest.raises(QuotaExceeded):
        store.begin_upload(ANN, address_of(LARGE), ContentKind.GRAPH, len(LARGE), 0, limits)


@pytest.mark.parametrize("data", [SMALL, LARGE], ids=["small", "large"])
def test_owners_learn_nothing_from_each_other(home: Home, data: bytes) -> None:
    """Bytes that another owner stores are unknown, must be sent in full, and outlive the other's deletion."""
    store = home.open()
    put(store, data, owner=ANN)
    for ask in (store.content, store.content_bytes, store.delete_content):
        with pytest.raises(ContentUnknown):
            ask(BEN, address_of(data))
    assert store.upload_state(BEN, address_of(data)) == (0, False)
    upload = begin(store, data, owner=BEN)
    with pytest.raises(ContentInvalid, match="ended after 0"):
        upload.publish(accept_all)
    put(store, data, owner=BEN)
    store.delete_content(ANN, address_of(data))
    with pytest.raises(ContentUnknown):
        store.content(ANN, address_of(data))
    assert read(store, BEN, address_of(data)) == data
    assert read(home.open(), BEN, address_of(data)) == data


def test_content_in_use_is_kept_until_its_jobs_end(home: Home) -> None:
    """Whether it is the graph, the weights or the names of the job."""
    store = home.open()
    parts = (graph(), weights(), names())
    submit(store, spec(parts[0], weights_address=parts[1].address, names_address=parts[2].address, inline=parts))
    lease = claim_one(store)
    for part in parts:
        with pytest.raises(ContentInUse):
            store.delete_content(ANN, part.address)
    assert finish(store, lease, answer())
    for part in parts:
        store.delete_content(ANN, part.address)
        with pytest.raises(ContentUnknown):
            store.delete_content(ANN, part.address)


def test_use_by_another_owner_does_not_keep_content(home: Home) -> None:
    store = home.open()
    put(store, SMALL, owner=ANN)
    put(store, SMALL, owner=BEN)
    submit(store, spec(address_of(SMALL)), owner=BEN)
    store.delete_content(ANN, address_of(SMALL))
    assert claim_one(store).graph.data == SMALL


def test_content_stored_by_a_submission_meanwhile_is_kept_once(home: Home) -> None:
    store = home.open()
    upload = begin(store, SMALL)
    upload.write(SMALL)
    submit(store, spec(graph(1)))
    assert upload.publish(lambda _: (8, 8)) == store.content(ANN, address_of(SMALL))
    assert store.content(ANN, address_of(SMALL)).vertices == 3


def test_random_pieces_make_the_same_content(home: Home) -> None:
    store = home.open()
    data = os.urandom(2_500_000)
    at, step = 0, 1
    while at < len(data):
        upload = begin(store, data, offset=at)
        upload.write(data[at : at + step])
        at, step = upload.committed, step * 3
        upload.release()
    upload = begin(store, data, offset=at)
    upload.publish(accept_all)
    assert read(store, ANN, address_of(data)) == data
