"""An outcome of the solver as the answer that is recorded.

The solver is trusted to be right, which the client's checker is there to confirm, but not to be well-formed: what could
not be stored or read back is a defect, and raises.
"""

from __future__ import annotations

from decimal import Decimal
from fractions import Fraction
from typing import TYPE_CHECKING, Any

import numpy as np

from nearchord_service.model.answer import (
    Answer,
    Column,
    ElementType,
    Prediction,
    ProofKind,
    Recognition,
    StructureReport,
)
from nearchord_service.model.stage import Verdict

if TYPE_CHECKING:
    from numpy.typing import NDArray

REASON_LENGTH = 2000
PROOF_FORMAT = 1  # of the columns proof_*, as the contract describes them
COUNT_DIGITS = 100_000  # converting so many takes a third of a second, and grows with their square
_COUNT_LIMIT = 10**COUNT_DIGITS
_COLOURS = frozenset({"colour", "scenario_colour"})


def recorded(outcome: Any, vertices: int) -> Answer:
    """Return the answer that an outcome on a graph with so many vertices is; ValueError where it is malformed.

    A cancelled solve leaves figures, but neither a value nor columns. O(length of the columns).
    """
    verdict = Verdict(outcome.verdict.value)
    kept = verdict is not Verdict.CANCELLED
    proven = any(name.startswith("proof_") for name in outcome.columns)
    return Answer(
        verdict=verdict,
        reason=_reason(outcome, verdict),
        count=_decimal(outcome.count) if kept else None,
        value=_exact(outcome.value) if kept else None,
        bound=_exact(outcome.bound),
        fill=_count(outcome.fill),
        fill_lower_bound=_count(outcome.fill_lower_bound),
        states=_count(outcome.states),
        bags=_count(outcome.bags),
        largest_bag=_count(outcome.largest_bag),
        parts=_count(outcome.parts),
        fill_cores=_count(outcome.fill_cores),
        proof=ProofKind(outcome.proof),
        proof_kinds=tuple(ProofKind(kind) for kind in outcome.proof_kinds),
        proof_format=PROOF_FORMAT if kept and proven else 0,
        columns=_columns(outcome, vertices) if kept else (),
        recognition=_recognition(outcome.recognition) if kept else None,
        structure=_structure(outcome.report) if kept else None,
    )


def _columns(outcome: Any, vertices: int) -> tuple[Column, ...]:
    """Return the choice, where there is one, and then whatever else the outcome has, in its order."""
    columns = [] if outcome.chosen is None else [_chosen(outcome.chosen, vertices)]
    columns.extend(_column(name, values, vertices) for name, values in outcome.columns.items())
    if len({column.name for column in columns}) < len(columns):
        raise ValueError("a column stands twice in the outcome")
    return tuple(columns)


def _chosen(chosen: NDArray[np.integer[Any]], vertices: int) -> Column:
    """Write chosen vertices as a column; ValueError unless they are vertices in ascending order, each once."""
    if chosen.ndim != 1 or chosen.size > vertices:
        raise ValueError(f"chosen has shape {chosen.shape} on {vertices} vertices")
    if chosen.size and (int(chosen[0]) < 0 or int(chosen[-1]) >= vertices or bool((chosen[1:] <= chosen[:-1]).any())):
        raise ValueError("chosen is not an ascending list of vertices")
    return Column("chosen", ElementType.UINT32, chosen.astype("<u4", copy=False).tobytes())


def _column(name: str, values: NDArray[Any], vertices: int) -> Column:
    """Write a column: uint32 are vertices or colours, int64 are numbers; ValueError for anything else."""
    if values.ndim != 1 or values.dtype not in (np.uint32, np.int64):
        raise ValueError(f"column {name} has shape {values.shape} and type {values.dtype}")
    if values.dtype == np.int64:
        return Column(name, ElementType.INT64, values.astype("<i8", copy=False).tobytes())
    if name not in _COLOURS and values.size and int(values.max()) >= vertices:
        raise ValueError(f"column {name} has vertex {int(values.max())} on {vertices} vertices")
    return Column(name, ElementType.UINT32, values.astype("<u4", copy=False).tobytes())


def _recognition(found: Any) -> Recognition | None:
    if found is None:
        return None
    return Recognition(
        _settled(found.chordal), _settled(found.interval), _settled(found.split), _count(found.splittance)
    )


def _settled(flag: Any) -> bool | None:
    return None if flag is None else bool(flag)


def _structure(report: Any) -> StructureReport | None:
    if report is None:
        return None
    predictions = tuple(
        Prediction(
            question=str(one.question),
            colours=int(one.colours),
            states=int(one.states),
            at_least=bool(one.at_least),
            memory_bytes=int(one.memory_bytes),
            fits=bool(one.fits),
        )
        for one in report.predictions
    )
    return StructureReport(int(report.components), int(report.largest_core), predictions)


def _exact(value: int | Fraction | None) -> tuple[int, int] | None:
    if value is None:
        return None
    exact = Fraction(value)
    if not -(2**63) <= exact.numerator < 2**63 or exact.denominator >= 2**63:
        raise ValueError(f"{exact} is no fraction of two int64")
    return exact.numerator, exact.denominator


def _decimal(count: int | None) -> str | None:
    """Write a count in decimal digits; None for one that is too long."""
    if count is None or count >= _COUNT_LIMIT:
        return None
    return str(Decimal(count))  # str of an int refuses more than some thousand digits


def _reason(outcome: Any, verdict: Verdict) -> str:
    reason = str(outcome.reason) or f"the solver gave no reason for {verdict}"
    if outcome.count is not None and outcome.count >= _COUNT_LIMIT:
        note = f"; the number of best choices has more than {COUNT_DIGITS} digits and is left out"
        return reason[: REASON_LENGTH - len(note)] + note
    return reason[:REASON_LENGTH]


def _count(value: int | None) -> int | None:
    return None if value is None or value < 0 else int(value)
