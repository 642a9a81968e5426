"""Answers from a stream of heads and column pieces."""

from __future__ import annotations

from decimal import Decimal
from types import MappingProxyType
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from nearchord.answer import Answer, Prediction, Provenance, Recognition, StructureReport
from nearchord.errors import ServerFault
from nearchord.session import replies
from nearchord.stages import Verdict
from nearchord.v1 import answer_pb2

DTYPES: dict[answer_pb2.ElementType, np.dtype[Any]] = {
    answer_pb2.ELEMENT_TYPE_UINT32: np.dtype("<u4"),
    answer_pb2.ELEMENT_TYPE_INT64: np.dtype("<i8"),
}

PAIRS = frozenset({"fill_edge", "proof_fill"})
"""Columns that hold pairs, one after the other."""

_NONE_CHOSEN = np.zeros(0, np.uint32)
_NONE_CHOSEN.flags.writeable = False


class AnswerAssembly:
    """Takes parts in the order of a stream and gives every answer once its last part has come."""

    def __init__(self) -> None:
        self._head: answer_pb2.AnswerHead | None = None
        self._columns: dict[str, bytearray] = {}

    def take(self, part: answer_pb2.AnswerPart) -> Answer | None:
        """Adds a part; returns the answer that it ends, if any (a head ends the answer before)."""
        if part.WhichOneof("part") == "head":
            ended = self.finish()
            self._head = part.head
            self._columns = {info.name: bytearray() for info in part.head.columns}
            return ended
        self._append(part.column)
        return None

    def finish(self) -> Answer | None:
        """The answer whose parts came last, when the stream has ended; ServerFault when pieces are missing."""
        head, self._head = self._head, None
        return None if head is None else answer(head, {c.name: self._column(head, c) for c in head.columns})

    def _append(self, chunk: answer_pb2.ColumnChunk) -> None:
        column = self._columns.get(chunk.name)
        if self._head is None or column is None:
            raise ServerFault(f"a piece of the column {chunk.name!r} came without having been announced; try again")
        info = next(c for c in self._head.columns if c.name == chunk.name)
        if len(column) != chunk.offset * DTYPES[info.type].itemsize:
            raise ServerFault(
                f"a piece of the column {chunk.name!r} is missing before element {chunk.offset}; try again"
            )
        column += chunk.data

    def _column(self, head: answer_pb2.AnswerHead, info: answer_pb2.ColumnInfo) -> NDArray[Any]:
        data = self._columns[info.name]
        if len(data) != info.length * DTYPES[info.type].itemsize:
            raise ServerFault(f"the column {info.name!r} of job {head.job_id} came incomplete; try again")
        column = np.frombuffer(bytes(data), DTYPES[info.type])
        native: NDArray[Any] = column.astype(column.dtype.newbyteorder("="), copy=False)
        if info.name in PAIRS and native.size % 2:
            raise ServerFault(f"the column {info.name!r} of job {head.job_id} has half a pair; try again")
        native.flags.writeable = False
        return native


def answer(head: answer_pb2.AnswerHead, columns: dict[str, NDArray[Any]]) -> Answer:
    """An answer from its head and whole columns."""
    return Answer(
        job_id=head.job_id,
        batch_index=head.batch_index,
        label=head.label,
        question=replies.question(head.question),
        verdict=_verdict(head),
        value=replies.rational(head.value) if head.HasField("value") else None,
        bound=replies.rational(head.bound) if head.HasField("bound") else None,
        chosen=columns.get("chosen", _NONE_CHOSEN),
        reason=head.reason,
        **{field: _known(head, field) for field in FIGURES},
        proof=replies.PROOF_KINDS[head.proof],
        proof_kinds=tuple(replies.PROOF_KINDS[kind] for kind in head.proof_kinds),
        seconds=head.provenance.seconds,
        vertices=head.vertices,
        names_address=head.names_address,
        provenance=provenance(head.provenance),
        columns=MappingProxyType({name: column for name, column in columns.items() if name != "chosen"}),
        recognition=_recognition(head.recognition) if head.HasField("recognition") else None,
        structure=_structure(head.structure) if head.HasField("structure") else None,
        count=_digits(head) if head.HasField("count") else None,
    )


FIGURES = ("fill", "fill_lower_bound", "states", "bags", "largest_bag", "parts", "fill_cores")


def _known(head: answer_pb2.AnswerHead, field: str) -> int | None:
    return int(getattr(head, field)) if head.HasField(field) else None


def _digits(head: answer_pb2.AnswerHead) -> int:
    """A number of any size; by way of Decimal, because int() refuses to read more than a few thousand digits."""
    if not head.count.isascii() or not head.count.isdecimal():
        raise ServerFault(f"the count of job {head.job_id} came as something else than digits; try again")
    return int(Decimal(head.count))


def _verdict(head: answer_pb2.AnswerHead) -> Verdict:
    verdict = replies.verdict(head.verdict)
    if verdict is None:
        raise ServerFault(f"the answer of job {head.job_id} came without a verdict; try again")
    return verdict


def _recognition(wire: answer_pb2.Recognition) -> Recognition:
    return Recognition(
        chordal=_settled(wire, "chordal"),
        interval=_settled(wire, "interval"),
        split=_settled(wire, "split"),
        splittance=int(wire.splittance) if wire.HasField("splittance") else None,
    )


def _settled(wire: answer_pb2.Recognition, field: Literal["chordal", "interval", "split"]) -> bool | None:
    return bool(getattr(wire, field)) if wire.HasField(field) else None


def _structure(wire: answer_pb2.StructureReport) -> StructureReport:
    predictions = tuple(
        Prediction(p.question, p.colours, p.states, p.at_least, p.memory_bytes, p.fits) for p in wire.predictions
    )
    return StructureReport(wire.components, wire.largest_core, predictions)


def provenance(wire: answer_pb2.Provenance) -> Provenance:
    """Where an answer comes from."""
    phases = ((replies.phase(p.phase), p.seconds) for p in wire.phases)
    return Provenance(
        graph_address=wire.graph_address,
        weights_address=wire.weights_address,
        solver_version=wire.solver_version,
        proof_format=wire.proof_format,
        budget=replies.budget(wire.budget),
        when_over=replies.when_over(wire.when_over),
        attempt=wire.attempt,
        phases=tuple((phase, seconds) for phase, seconds in phases if phase is not None),
        seconds=wire.seconds,
        wait_seconds=wire.wait_seconds,
        peak_memory_bytes=wire.peak_memory_bytes,
        finished_at=replies.moment(wire, "finished_at"),
    )
