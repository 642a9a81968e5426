"""Exact values as JSON has them and as people read them."""

from __future__ import annotations

from fractions import Fraction


def exact(value: int | Fraction | None) -> int | str | None:
    """A value as JSON has it: whole, "p/q", or null."""
    if value is None or isinstance(value, int):
        return value
    return value.numerator if value.denominator == 1 else f"{value.numerator}/{value.denominator}"


def number(value: int | Fraction | None) -> str:
    """A value as people read it."""
    return "unknown" if value is None else f"{value:,}" if isinstance(value, int) else str(value)


def size(count: int) -> str:
    """Bytes as people read them, in the largest binary unit of which there is one."""
    units = ("B", "KiB", "MiB", "GiB", "TiB")
    scale = min(max(count.bit_length() - 1, 0) // 10, len(units) - 1)
    return f"{count} B" if scale == 0 else f"{count / 2 ** (10 * scale):,.1f} {units[scale]}"
