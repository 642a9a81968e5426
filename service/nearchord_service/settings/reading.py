"""Reads the words of options: addresses, sizes, times, counts. Each raises ArgumentTypeError with what would do."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable, Mapping
from typing import Any

from nearchord_service.settings.values import Address

_SIZES = {"": 1, "KiB": 2**10, "MiB": 2**20, "GiB": 2**30, "TiB": 2**40}
_SPANS = {"": 1, "s": 1, "m": 60, "h": 3_600, "d": 86_400}
_LEVELS = ("DEBUG", "INFO", "WARNING", "ERROR")


def address(text: str) -> Address:
    """Read HOST:PORT, with brackets around an IPv6 host."""
    host, colon, port = text.rpartition(":")
    host = host.removeprefix("[").removesuffix("]")
    if not colon or not host or not port.isascii() or not port.isdigit() or int(port) > 65_535:
        raise argparse.ArgumentTypeError(f"{text!r} is not HOST:PORT with a port from 0 to 65535")
    return Address(host, int(port))


def address_or_none(text: str) -> Address | None:
    """Read HOST:PORT, or `none`."""
    return None if text == "none" else address(text)


def _scaled(text: str, units: Mapping[str, int], what: str) -> float:
    number = text.rstrip("".join(units))
    try:
        value = float(number) * units[text[len(number) :]]
    except (ValueError, KeyError):
        raise argparse.ArgumentTypeError(f"{text!r} is not {what}") from None
    if not math.isfinite(value) or value < 0:
        raise argparse.ArgumentTypeError(f"{text!r} is not {what}")
    return value


def size(text: str) -> int:
    """Read bytes: 1048576 or 1MiB."""
    return int(_scaled(text, _SIZES, "a number of bytes such as 1048576, 64MiB or 2GiB"))


def span(text: str) -> float:
    """Read seconds: 90, 90s, 15m, 12h or 30d."""
    return _scaled(text, _SPANS, "a number of seconds such as 90, 15m, 12h or 30d")


def count(text: str) -> int:
    """Read a whole number that is at least 0."""
    if not text.isascii() or not text.isdigit():
        raise argparse.ArgumentTypeError(f"{text!r} is not a whole number that is at least 0")
    return int(text)


def positive(read: Callable[[str], Any]) -> Callable[[str], Any]:
    """Refuse 0."""

    def checked(text: str) -> Any:
        value = read(text)
        if value <= 0:
            raise argparse.ArgumentTypeError(f"{text!r} is not above 0")
        return value

    return checked


def optional(read: Callable[[str], Any]) -> Callable[[str], Any]:
    """Accept `none` too."""
    return lambda text: None if text == "none" else read(text)


def switch(text: str) -> bool:
    """Read yes or no."""
    if text not in ("yes", "no"):
        raise argparse.ArgumentTypeError(f"{text!r} is neither yes nor no")
    return text == "yes"


def level(text: str) -> str:
    """Read a log level."""
    if text.upper() not in _LEVELS:
        raise argparse.ArgumentTypeError(f"{text!r} is none of {', '.join(_LEVELS)}")
    return text.upper()
