"""`serve`: this command becomes the service."""

from __future__ import annotations

import os
import sys
from typing import Any

import pytest


class Replaced(Exception):
    """Stands for the moment after which this process is another program."""


@pytest.fixture
def replaced(monkeypatch: pytest.MonkeyPatch) -> list[list[str]]:
    """The command lines that the process was replaced by."""
    lines: list[list[str]] = []

    def execv(program: str, words: list[str]) -> None:
        assert program == words[0] == sys.executable
        lines.append(words[1:])
        raise Replaced

    monkeypatch.setattr(os, "execv", execv)
    monkeypatch.setenv("NEARCHORD_TRACEBACK", "1")
    monkeypatch.delenv("NEARCHORD_DATA", raising=False)
    return lines


def test_options_are_handed_on_and_defaults_left_to_the_service(
    nearchord_command: Any, replaced: list[list[str]]
) -> None:
    """Only what was said is passed, also options that only the service knows."""
    for words in ("--data d", "--data d --listen h:1 --workers 3 --metrics none --pins 9"):
        with pytest.raises(Replaced):
            nearchord_command("serve", *words.split())
    assert [" ".join(line) for line in replaced] == [
        "-m nearchord_service --data d",
        "-m nearchord_service --data d --listen h:1 --metrics none --workers 3 --pins 9",
    ]


def test_data_folder_may_come_from_the_environment(
    nearchord_command: Any, replaced: list[list[str]], monkeypatch: pytest.MonkeyPatch
) -> None:
    """As for the service itself."""
    monkeypatch.setenv("NEARCHORD_DATA", "there")
    with pytest.raises(Replaced):
        nearchord_command("serve")
    assert replaced == [["-m", "nearchord_service", "--data", "there"]]


def test_service_that_is_not_installed_is_a_usage_error(
    nearchord_command: Any, replaced: list[list[str]], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The remedy is the extra to install."""
    monkeypatch.setattr("importlib.util.find_spec", lambda name: None)
    ran = nearchord_command("serve", "--data", "d")
    assert ran.code == 2
    assert "nearchord[service]" in ran.err
    assert replaced == []
