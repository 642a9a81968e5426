"""Weights as they are written in files: whole numbers, or decimals that a scale makes whole."""

from __future__ import annotations

import re
from decimal import Decimal

from nearchord.canonical import WEIGHT_LIMIT
from nearchord.errors import BadInput

WHOLE = re.compile(r"[+-]?[0-9]{1,40}", re.ASCII)
DECIMAL = re.compile(r"[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]{1,6})?", re.ASCII)
LARGEST_EXPONENT = 40


def checked_scale(scale: int | None) -> int:
    """The factor for all weights, 1 for None; BadInput unless it is a whole number from 1."""
    if scale is None:
        return 1
    if isinstance(scale, bool) or not isinstance(scale, int) or scale < 1:
        raise BadInput(f"scale is {scale!r}", "give a whole number of at least 1, such as 100 for two decimals")
    return scale


def weight_from(text: str, scale: int, what: str = "weight") -> int:
    """`text` times `scale`; BadInput unless that is a whole number from 0 to below 2^62. `what` it is, for messages."""
    text = text.strip()
    if WHOLE.fullmatch(text):
        return _in_range(text, int(text) * scale, what)
    if not DECIMAL.fullmatch(text) or len(text) > 400:
        raise BadInput(f"{what} {text[:40]!r} is not a number", "write a whole number of at least 0")
    return _in_range(text, _scaled(text, scale, what), what)


def _scaled(text: str, scale: int, what: str) -> int:
    number = Decimal(text)
    if number.adjusted() > LARGEST_EXPONENT:
        return WEIGHT_LIMIT if number > 0 else -1
    numerator, denominator = (0, 1) if number.adjusted() < -LARGEST_EXPONENT and not number else _ratio(number, what)
    if numerator * scale % denominator:
        needed = _whole_scale(denominator)
        raise BadInput(
            f"{what} {text} times the scale {scale} is not a whole number"
            if scale > 1
            else f"{what} {text} is not a whole number",
            f"multiply all {what}s: scale={needed} (on the command line --scale {needed})",
        )
    return numerator * scale // denominator


def _ratio(number: Decimal, what: str) -> tuple[int, int]:
    if number and number.adjusted() < -LARGEST_EXPONENT:
        raise BadInput(f"{what} {number} is too close to 0", "write a whole number of at least 0")
    return number.as_integer_ratio()


def _whole_scale(denominator: int) -> int:
    """The smallest power of ten that `denominator`, a product of twos and fives, divides."""
    power = 1
    while power % denominator:
        power *= 10
    return power


def _in_range(text: str, weight: int, what: str) -> int:
    if weight < 0:
        raise BadInput(f"{what} {text} is negative", f"give {what}s of at least 0")
    if weight >= WEIGHT_LIMIT:
        raise BadInput(f"{what} {text} is 2^62 or more", f"count in a larger unit: divide all {what}s")
    return weight
