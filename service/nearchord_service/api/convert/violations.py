"""Collects what is wrong with a request, so that one answer names all of it."""

from __future__ import annotations

from nearchord_service.model.errors import FieldInvalid, FieldViolation


class Violations:
    """Wrong fields of one request, in the order found."""

    def __init__(self) -> None:
        self._found: list[FieldViolation] = []

    def add(self, field: str, description: str) -> None:
        """Note a wrong field."""
        self._found.append(FieldViolation(field, description))

    def settle(self) -> None:
        """Raise FieldInvalid when anything was noted."""
        if self._found:
            raise FieldInvalid(*self._found)
