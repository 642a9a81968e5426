"""How an engine ended."""

from enum import IntEnum


class Status(IntEnum):
    """FOUND: a minimum fill within the limit.  NONE: there is none.  STOPPED: told to.  TOO_LARGE: not its size."""

    FOUND = 0
    STOPPED = 1
    NONE = 2
    TOO_LARGE = 3
