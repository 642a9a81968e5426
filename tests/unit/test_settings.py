"""Settings: three sources in order, and a message that names the option for whatever is wrong."""

from __future__ import annotations

from pathlib import Path

import pytest
from nearchord_service.settings import Address, Settings, read_settings


def refused(capsys: pytest.CaptureFixture[str], *arguments: str, **environment: str) -> str:
    with pytest.raises(SystemExit) as caught:
        read_settings(arguments, environment)
    assert caught.value.code == 2
    return capsys.readouterr().err.splitlines()[-1]


def test_defaults_are_those_of_the_design() -> None:
    found = read_settings(["--data", "d"], {})
    assert (found.data, str(found.listen), str(found.metrics)) == (Path("d"), "127.0.0.1:7411", "127.0.0.1:7412")
    assert found.workers >= 1
    assert (found.default_states, found.default_seconds, found.default_memory) == (10**7, 60.0, 2**30)
    assert found.default_budget.fill is None
    assert found.largest_memory is not None


def test_the_command_line_wins_over_the_environment() -> None:
    found = read_settings(
        ["--workers", "3"], {"NEARCHORD_DATA": "d", "NEARCHORD_WORKERS": "2", "NEARCHORD_GRACE": "2m"}
    )
    assert (found.workers, found.grace) == (3, 120.0)


def test_units_are_read() -> None:
    arguments = "--data d --answer-age 2h --content-bytes 3MiB --largest-memory none --metrics none --listen [::1]:0"
    found = read_settings(arguments.split(), {})
    assert (found.answer_age, found.content_bytes, found.largest_memory, found.metrics) == (
        7_200.0,
        3 * 2**20,
        None,
        None,
    )
    assert (found.listen, str(found.listen)) == (Address("::1", 0), "[::1]:0")


def test_switches_need_no_value() -> None:
    found = read_settings(["--data", "d", "--exit-on-stdin-close", "--reflection", "no"], {})
    assert (found.exit_on_stdin_close, found.reflection) == (True, False)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ("", "option --data is missing"),
        ("--data d --listen here", "argument --listen: 'here' is not HOST:PORT"),
        ("--data d --listen 1.2.3.4:99999", "argument --listen"),
        ("--data d --workers 0", "argument --workers: '0' is not above 0"),
        ("--data d --workers -1", "argument --workers"),
        ("--data d --grace soon", "argument --grace: 'soon' is not a number of seconds"),
        ("--data d --grace nan", "argument --grace"),
        ("--data d --content-bytes 3MB", "argument --content-bytes: '3MB' is not a number of bytes"),
        ("--data d --log-level loud", "argument --log-level"),
        ("--data d --reflection maybe", "argument --reflection: 'maybe' is neither yes nor no"),
        ("--data d --inline-bytes 4MiB", "option --inline-bytes"),
        ("--data d --default-seconds 2h", "option --default-seconds: 7200.0 is above --largest-seconds 3600.0"),
        ("--data d --largest-fill 5", "option --default-fill: none is above --largest-fill 5"),
        ("--data d --bogus", "unrecognized arguments: --bogus"),
    ],
)
def test_a_wrong_option_is_named(capsys: pytest.CaptureFixture[str], arguments: str, words: str) -> None:
    assert words in refused(capsys, *arguments.split())


def test_a_wrong_variable_is_named(capsys: pytest.CaptureFixture[str]) -> None:
    message = refused(capsys, "--data", "d", NEARCHORD_WORKERS="many")
    assert "variable NEARCHORD_WORKERS (option --workers): 'many' is not a whole number" in message


@pytest.mark.parametrize("host", ["0.0.0.0", "192.0.2.1", "example"])
def test_plaintext_beyond_this_machine_has_to_be_asked_for(capsys: pytest.CaptureFixture[str], host: str) -> None:
    assert "accept the risk with --allow-plaintext" in refused(capsys, "--data", "d", "--listen", f"{host}:1")
    found = read_settings(["--data", "d", "--listen", f"{host}:1", "--allow-plaintext"], {})
    assert found.listen.host == host


@pytest.mark.parametrize("host", ["127.0.0.1", "127.1.2.3", "localhost", "[::1]"])
def test_loopback_needs_no_encryption(host: str) -> None:
    assert read_settings(["--data", "d", "--listen", f"{host}:1"], {}).listen.loopback


def test_limits_and_retention_follow_the_settings() -> None:
    settings = Settings(Path("d"), unfinished_jobs=7, stored_bytes=8, answer_age=9.0, retained_content_bytes=10)
    assert (settings.limits.unfinished_jobs, settings.limits.content_bytes) == (7, 8)
    assert (settings.retention.answer_age, settings.retention.content_bytes) == (9.0, 10)
