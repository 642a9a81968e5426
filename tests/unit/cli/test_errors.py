"""Failures: one message on stderr with place and remedy, a fixed exit code, never a traceback."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import nearchord
import pytest
from nearchord.cli import connection
from unit.cli.conftest import FakeService

ASK = ("--question", "independent-set")


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        (["solve", "{square}"], 2, ["--question"]),
        (["solve", "{square}", "--question", "clairvoyance"], 2, ["clairvoyance", "independent-set"]),
        (["solve", "{square}", *ASK, "--bribe"], 2, ["--bribe"]),
        (["solve", "{square}", *ASK, "--memory", "many"], 2, ["many", "512MiB"]),
        (["solve", "{square}", *ASK, "--not-after", "soon"], 2, ["soon", "+3600"]),
        (["solve", "{square}", *ASK, "--states", "few"], 2, ["--states", "few"]),
        (["solve", "missing.col", *ASK], 2, ["missing.col"]),
        (["solve", "{square}", *ASK, "--weights", "missing.csv"], 2, ["missing.csv"]),
        (["batch", "{folder}/none-*.col", *ASK], 2, ["none-*.col", "no file"]),
        (["frobnicate"], 2, ["frobnicate"]),
        (["serve"], 2, ["--data"]),
        (["check", "{square}", "missing.json"], 2, ["missing.json"]),
    ],
)
def test_usage_errors_exit_with_two(
    service: FakeService, nearchord_command: Any, square: Path, arguments: list[str], code: int, words: list[str]
) -> None:
    """What was wrong stands in the one message."""
    told = [argument.format(square=square, folder=square.parent) for argument in arguments]
    ran = nearchord_command(*told)
    assert ran.code == code
    assert ran.out == ""
    assert ran.err.startswith("error: ")
    assert all(word in ran.err for word in words), ran.err
    assert "Traceback" not in ran.err
    assert service.submitted == []


@pytest.mark.parametrize(
    ("error", "code"),
    [
        (nearchord.Unreachable("no server answers at host:1; start one"), 4),
        (nearchord.EmbeddedFailed("the private service did not start"), 4),
        (nearchord.TimeoutExceeded("too long"), 4),
        (nearchord.Rejected("budget.states: must be at least 1"), 2),
        (nearchord.NotFound("no job"), 2),
        (nearchord.QuotaExceeded("too many jobs"), 2),
        (nearchord.AccessDenied("wrong token"), 2),
        (nearchord.NotReady("has not ended"), 1),
        (nearchord.CheckFailed("1 and 2 conflict"), 1),
        (nearchord.ServerFault("a defect"), 1),
    ],
)
def test_every_failure_has_its_code(
    service: FakeService,
    nearchord_command: Any,
    square: Path,
    monkeypatch: pytest.MonkeyPatch,
    error: nearchord.NearchordError,
    code: int,
) -> None:
    """The text of the error is the message."""

    def fail(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr(service, "submit", fail)
    ran = nearchord_command("solve", str(square), *ASK)
    assert (ran.code, ran.out, ran.err) == (code, "", f"error: {error}\n")


def test_token_comes_from_the_environment_or_a_file(
    service: FakeService, nearchord_command: Any, square: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Never from a flag; the variable wins over the file."""
    file = tmp_path / "token"
    file.write_text("from-file\n", encoding="utf-8")
    monkeypatch.setenv("NEARCHORD_TOKEN_FILE", str(file))
    monkeypatch.setenv("NEARCHORD_SERVER", "host:2")
    nearchord_command("submit", str(square), *ASK)
    monkeypatch.setenv("NEARCHORD_TOKEN", "direct")
    nearchord_command("submit", str(square), *ASK)
    assert service.connected == [("host:2", "from-file"), ("host:2", "direct")]


def test_unreadable_token_file_is_named(
    service: FakeService, nearchord_command: Any, square: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A wrong path must not become a call without a token."""
    monkeypatch.setenv("NEARCHORD_TOKEN_FILE", "/nowhere/token")
    ran = nearchord_command("submit", str(square), *ASK)
    assert ran.code == 2
    assert "/nowhere/token" in ran.err
    assert service.connected == []


def test_commands_without_a_server_look_at_the_standard_address(
    service: FakeService, nearchord_command: Any, square: Path
) -> None:
    """`submit` outlives its command, so it never starts a private service."""
    nearchord_command("submit", str(square), *ASK)
    assert service.connected == [(connection.STANDARD_SERVER, None)]


def test_defects_are_one_message_too(
    service: FakeService, nearchord_command: Any, square: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A traceback only for those who ask for one."""

    def fail(*_: object, **__: object) -> None:
        raise ZeroDivisionError("by nothing")

    monkeypatch.setattr(service, "submit", fail)
    ran = nearchord_command("solve", str(square), *ASK)
    assert ran.code == 1
    assert "ZeroDivisionError: by nothing" in ran.err
    assert ran.err.count("\n") == 1
    monkeypatch.setenv("NEARCHORD_TRACEBACK", "1")
    with pytest.raises(ZeroDivisionError):
        nearchord_command("solve", str(square), *ASK)
