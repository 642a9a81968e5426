"""Canonical bytes as arrays, without copying what is mapped from a file."""

from __future__ import annotations

import mmap
from typing import TYPE_CHECKING

import numpy as np

from nearchord_service.model.content import Bytes

if TYPE_CHECKING:
    from numpy.typing import NDArray

_HEAD_BYTES = 12


def buffer(content: Bytes) -> bytes | mmap.mmap:
    """Return the bytes of content: those in memory, or the file mapped read-only (it does not change under a lease)."""
    if content.data is not None:
        return content.data
    if content.path is None:
        raise ValueError("content has neither bytes nor a file")
    with content.path.open("rb") as file:
        return mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ)


def graph_rows(content: Bytes, vertices: int, edges: int) -> tuple[NDArray[np.uint64], NDArray[np.uint32]]:
    """Return row pointers uint64[n+1] and targets uint32[m] of a canonical graph; ValueError when the sizes differ."""
    data = buffer(content)
    expected = _HEAD_BYTES + 8 * (vertices + 1) + 4 * edges
    size = memoryview(data).nbytes
    if size != expected:
        raise ValueError(f"the graph has {size} bytes, but {vertices} vertices and {edges} edges take {expected}")
    n = int.from_bytes(memoryview(data)[:4], "little")
    m = int.from_bytes(memoryview(data)[4:_HEAD_BYTES], "little")
    if (n, m) != (vertices, edges):
        raise ValueError(f"the graph says {n} vertices and {m} edges, but the job {vertices} and {edges}")
    row_ptr = np.frombuffer(data, "<u8", vertices + 1, _HEAD_BYTES)
    targets = np.frombuffer(data, "<u4", edges, _HEAD_BYTES + 8 * (vertices + 1))
    return row_ptr, targets


def weight_values(content: Bytes, vertices: int, scenarios: int = 0) -> NDArray[np.int64]:
    """Return weights int64[n], or int64[R, n] of R >= 1 scenarios; ValueError when their number differs."""
    values = np.frombuffer(buffer(content), "<i8") if vertices else np.zeros(0, np.int64)
    if values.size != vertices * max(1, scenarios):
        among = f" in each of {scenarios} scenarios" if scenarios else ""
        raise ValueError(f"there are {values.size} weights for {vertices} vertices{among}")
    return values.reshape(scenarios, vertices) if scenarios else values
