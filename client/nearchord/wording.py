"""Numbers with the nouns they count."""

from __future__ import annotations


def counted(number: int, what: str) -> str:
    """A number with the noun it counts: `what` names one thing and takes an s for any other number."""
    return f"{number:,} {what}" if number == 1 else f"{number:,} {what}s"


def named(number: int, what: str) -> str:
    """Says that so many of something are named."""
    return f"{counted(number, what)} {'is' if number == 1 else 'are'} named"
