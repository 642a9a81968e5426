"""The content of a submission: what it brings along, what it names, and whether each is fit for its use."""

from __future__ import annotations

import os
from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass
from functools import partial

from nearchord_service.model.content import ContentKind, NewContent
from nearchord_service.model.errors import ContentUnknown, FieldInvalid, FieldViolation
from nearchord_service.model.job import JobSpec, Submission
from nearchord_service.model.question import Question
from nearchord_service.store.sql.content import INSERT_BLOB, INSERT_CONTENT, OWNED, SMALL_BYTES, TOUCH, bytes_at
from nearchord_service.store.sql.disk import Disk, disk_trouble, new_file_name
from nearchord_service.store.sql.writer import Transaction


@dataclass(frozen=True)
class Held:
    """What is known of content that a spec uses."""

    kind: str
    vertices: int
    edges: int


class SubmittedContent:
    """Content on its way into the database together with its jobs."""

    def __init__(self, submission: Submission, disk: Disk) -> None:
        """Write large inline content to files; raises StoreUnavailable when that fails."""
        self._submission = submission
        self._disk = disk
        self._inline = {new.address: new for spec in submission.specs for new in spec.inline}
        self._known: dict[str, Held] = {}
        self._files: dict[str, str] = {}
        try:
            for new in self._inline.values():
                if len(new.data) >= SMALL_BYTES:
                    name = self._files[new.address] = new_file_name(new.address)
                    self._write_file(name, new.data)
        except OSError as fault:
            self.abandon()
            raise disk_trouble(disk.content, fault) from fault

    def _write_file(self, name: str, data: bytes) -> None:
        descriptor = self._disk.open(name, keep=0)
        try:
            self._disk.write(descriptor, data)
            self._disk.sync(descriptor)
        finally:
            os.close(descriptor)

    def abandon(self) -> None:
        """Remove files of a submission that was not accepted; what cannot be removed goes at the next start."""
        for name in self._files.values():
            with suppress(OSError):
                self._disk.remove(name)

    def look_up(self, transaction: Transaction) -> None:
        """Find out what the owner has stored already of everything the specs use."""
        named = {address for spec in self._submission.specs for _, address, _ in _needs(spec)}
        for address in named | self._inline.keys():
            row = transaction.one(OWNED, owner=self._submission.owner, address=address)
            if row is not None:
                self._known[address] = Held(row["kind"], row["vertices"], row["edges"])

    def graph_of(self, index: int, spec: JobSpec) -> Held:
        """Check the content of one spec; returns its graph. Raises ContentUnknown, FieldInvalid."""
        path = f"specs[{index}].input" if self._submission.batch else "spec.input"
        graph = Held("", 0, 0)
        for name, address, kind in _needs(spec):
            held = self._held(address)
            wrong = None
            if held.kind != kind:
                wrong = f"{address} is stored as {held.kind}; name content of kind {kind}"
            elif kind is ContentKind.GRAPH:
                graph = held
            else:
                wrong = _wrong_length(held, graph, spec.question if kind is ContentKind.WEIGHTS else None, address)
            if wrong is not None:
                raise FieldInvalid(FieldViolation(f"{path}.{name}_address", wrong))
        return graph

    def _held(self, address: str) -> Held:
        held = self._known.get(address)
        if held is not None:
            return held
        new = self._inline.get(address)
        if new is None:
            raise ContentUnknown(address)
        return Held(new.kind, new.vertices, new.edges)

    def new_bytes(self) -> int:
        """Return by how much the owner's stored bytes grow."""
        return sum(len(new.data) for new in self._new())

    def _new(self) -> list[NewContent]:
        return [new for new in self._inline.values() if new.address not in self._known]

    def store(self, transaction: Transaction) -> None:
        """Write what is new, note the use of what is known, and see that spare files go."""
        owner, now = self._submission.owner, transaction.now
        blobs, contents = [], []
        for new in self._new():
            file = self._files.get(new.address)
            data = new.data if file is None else None
            same = {"address": new.address, "size_bytes": len(new.data)}
            blobs.append({**same, "data": data, "file": file})
            figures = {"kind": new.kind, "vertices": new.vertices, "edges": new.edges}
            contents.append({**same, **figures, "owner": owner, "created_at": now, "used_at": now})
        transaction.run_many(INSERT_BLOB, blobs)
        transaction.run_many(INSERT_CONTENT, contents)
        transaction.run_many(TOUCH, [{"whose": owner, "which": address, "now": now} for address in self._known])
        for address, name in self._files.items():
            if bytes_at(transaction, self._disk, address).path != self._disk.path(name):
                transaction.news.afterwards.append(partial(self._disk.remove, name))


def _wrong_length(held: Held, graph: Held, weighing: Question | None, address: str) -> str | None:
    """Say what is wrong with the length of names, or of the weights of a question, if anything."""
    wanted = graph.vertices if weighing is None else weighing.weights_of(graph.vertices)
    if held.vertices == wanted:
        return None
    said = f"{address} has {held.vertices} entries, the graph {graph.vertices} vertices; give one a vertex"
    if weighing is not None and weighing.scenarios:
        said += f" for each of {weighing.scenarios} scenarios, {wanted} in all"
    return said


def _needs(spec: JobSpec) -> Iterable[tuple[str, str, ContentKind]]:
    yield "graph", spec.graph_address, ContentKind.GRAPH
    if spec.weights_address is not None:
        yield "weights", spec.weights_address, ContentKind.WEIGHTS
    if spec.names_address is not None:
        yield "names", spec.names_address, ContentKind.NAMES
