"""The proof of an answer in a file of its own: JSON with the columns `proof_*` as the contract describes them."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np

import nearchord
from nearchord.cli.numbers import size

PREFIXES = ("proof_", "bottleneck_")
"""Columns of the certificate; bottleneck prices belong to it, because their proof is about their very numerators."""
FORMAT = 1
MOST_BYTES = 1 << 30


def write(file: str, answer: nearchord.Answer) -> bool:
    """Write the proof of `answer`; False, and no file, without one. FileProblem if it cannot be written."""
    columns = {name: column for name, column in answer.columns.items() if name.startswith(PREFIXES)}
    if not any(name.startswith(PREFIXES[0]) for name in columns):
        return False
    found = {
        "proof_format": answer.provenance.proof_format,
        "graph_address": answer.provenance.graph_address,
        "columns": {name: {"type": column.dtype.name, "data": column.tolist()} for name, column in columns.items()},
    }
    try:
        Path(file).write_text(json.dumps(found, separators=(",", ":")) + "\n", encoding="utf-8")
    except OSError as error:
        raise nearchord.FileProblem(file, None, f"the proof cannot be written ({error})", "give another file") from None
    return True


def why_none(answer: nearchord.Answer) -> str:
    """Why `write` had nothing to write."""
    if isinstance(answer.question, nearchord.Fill):
        return "what proves a fill is in the object that --json prints"
    return f"the answer carries none ({answer.proof})"


def size_of(answer: nearchord.Answer) -> str:
    """What the proof of `answer` takes, in all and for each vertex."""
    return f"{size(answer.proof_bytes)} ({answer.proof_bytes / max(answer.vertices, 1):.1f} bytes a vertex)"


def read(file: str, graph: nearchord.Graph) -> dict[str, Any]:
    """The columns in `file`, which has to be about `graph`; FileProblem says what does not fit."""
    try:
        if Path(file).stat().st_size > MOST_BYTES:
            raise ValueError(f"it is larger than {MOST_BYTES} bytes")
        found = json.loads(Path(file).read_text(encoding="utf-8"))
        if found["proof_format"] != FORMAT:
            raise ValueError(f"its format is {found['proof_format']!r}, this client reads {FORMAT}")
        if found["graph_address"] != graph.address:
            raise ValueError(f"it is about the graph {found['graph_address']}, not about this one ({graph.address})")
        return {name: _column(column) for name, column in found["columns"].items() if name.startswith(PREFIXES)}
    except (AttributeError, KeyError, OSError, OverflowError, RecursionError, TypeError, ValueError) as error:
        why = f"this is no proof for this graph: {error}"
        raise nearchord.FileProblem(file, None, why, "give what `solve --proof` wrote") from None


def _column(column: dict[str, Any]) -> Any:
    if column["type"] not in ("uint32", "int64"):
        raise ValueError(f"it has a column of type {column['type']!r}")
    if not all(type(number) is int for number in column["data"]):
        raise ValueError("it has a column with something else than whole numbers")
    return np.array(column["data"], column["type"])
