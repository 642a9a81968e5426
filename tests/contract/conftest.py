"""Fixtures of the contract suites."""

from __future__ import annotations

from contract.stores import home  # noqa: F401
