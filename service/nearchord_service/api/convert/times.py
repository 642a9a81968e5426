"""Time stamps."""

from __future__ import annotations

import datetime as dt

from google.protobuf.timestamp_pb2 import Timestamp

_EPOCH = dt.datetime(1970, 1, 1, tzinfo=dt.UTC)
_SECONDS = (-62_135_596_800, 253_402_300_799)


def to_timestamp(time: dt.datetime | None) -> Timestamp | None:
    """Write an aware time; None stays absent."""
    if time is None:
        return None
    since = time - _EPOCH
    return Timestamp(seconds=since.days * 86_400 + since.seconds, nanos=since.microseconds * 1_000)


def from_timestamp(stamp: Timestamp) -> dt.datetime | None:
    """Read a time stamp in whole microseconds, rounded down; None when it is outside the years 1 to 9999."""
    if not _SECONDS[0] <= stamp.seconds <= _SECONDS[1] or not 0 <= stamp.nanos < 1_000_000_000:
        return None
    return _EPOCH + dt.timedelta(seconds=stamp.seconds, microseconds=stamp.nanos // 1_000)
