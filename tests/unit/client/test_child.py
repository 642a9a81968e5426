"""The private service: how the child process is started, heard, and ended, with stand-ins for the service."""

from __future__ import annotations

import asyncio
import sys
import textwrap
import threading
from pathlib import Path

import nearchord
import pytest
from nearchord import child as module
from nearchord.child import Child, command
from unit.client.fake_service import FakeService, served

READY = 'print("nearchord accepts calls on 127.0.0.1:4711, data in somewhere", flush=True)'


def child(code, on_line=None, **options):
    """A child process that runs some Python."""
    return Child([sys.executable, "-c", textwrap.dedent(code)], on_line, **options)


def test_the_address_is_read_from_the_line():
    """The child says where it accepts calls; stopping it twice is harmless."""
    running = child(f"import sys\n{READY}\nsys.stdin.read()")
    assert running.start() == "127.0.0.1:4711"
    running.stop()
    running.stop()


def test_stopping_before_a_start_is_harmless():
    """Nothing to end."""
    child("").stop()


def test_log_lines_are_handed_on():
    """Every line on the child's standard error reaches the caller."""
    heard, all_heard = [], threading.Event()

    def on_line(line):
        heard.append(line)
        if line == "two":
            all_heard.set()

    running = child(
        f'import sys\nprint("one", file=sys.stderr)\nprint("two", file=sys.stderr)\n{READY}\nsys.stdin.read()', on_line
    )
    running.start()
    assert all_heard.wait(20)
    running.stop()
    assert heard == ["one", "two"]


def test_a_child_that_does_not_end_is_killed():
    """SIGTERM, the grace period, SIGKILL."""
    running = child(
        f"import signal, threading\nsignal.signal(signal.SIGTERM, signal.SIG_IGN)\n{READY}\nthreading.Event().wait()",
        grace_seconds=0.2,
    )
    running.start()
    process = running._process
    running.stop()
    assert process.returncode == -9


def test_a_child_that_dies_leaves_its_last_words():
    """The end of the log is in the error."""
    with pytest.raises(
        nearchord.EmbeddedFailed, match=r"ended with code 3; its last words:\nthe disk is full"
    ) as caught:
        child('import sys\nprint("the disk is full", file=sys.stderr)\nsys.exit(3)').start()
    assert caught.value.reason == "NOT_STARTED"


def test_a_child_that_says_nothing_is_given_up():
    """The wait for the line is bounded."""
    with pytest.raises(nearchord.EmbeddedFailed, match=r"said nothing for 0\.3 seconds"):
        child("import sys\nsys.stdin.read()", start_seconds=0.3).start()


def test_a_missing_extra_is_named():
    """Whoever has only the client learns what to install."""
    with pytest.raises(
        nearchord.EmbeddedFailed, match=r'install the service extra: pip install "nearchord\[service\]"'
    ) as caught:
        child("import a_module_that_is_not_there").start()
    assert "needs a_module_that_is_not_there" in str(caught.value)
    assert caught.value.reason == "EXTRA_MISSING"


def test_the_command_line_is_that_of_the_service():
    """Free loopback port, no metrics, ends with its parent."""
    words = command("/data", 2)
    assert words[1:3] == ["-m", "nearchord_service"]
    assert words[3:] == [
        *("--data", "/data", "--listen", "127.0.0.1:0", "--metrics", "none", "--exit-on-stdin-close"),
        *("--workers", "2"),
    ]
    assert "--workers" not in command("/data", None)


@pytest.fixture
def stand_in(monkeypatch):
    """A child that names the address of a service in memory; records its data folder."""
    folders = []
    with served(FakeService()) as target:

        def stand_in_command(folder, workers):
            folders.append(folder)
            code = f'import sys\nprint("nearchord accepts calls on {target}, data in x", flush=True)\nsys.stdin.read()'
            return [sys.executable, "-c", code]

        monkeypatch.setattr(module, "command", stand_in_command)
        yield folders


def test_embedded_gives_a_session_for_the_block(stand_in, tmp_path):
    """A temporary data folder goes away afterwards, one of the caller's stays."""
    with nearchord.embedded() as service:
        assert service.server().version == "1"
    with nearchord.embedded(data=tmp_path) as service:
        assert service.server().version == "1"
    assert not Path(stand_in[0]).exists()
    assert stand_in[1] == str(tmp_path)
    assert tmp_path.exists()


def test_embedded_async_gives_a_session_for_the_block(stand_in):
    """The same for a running event loop, also when the block fails."""

    async def use():
        async with nearchord.embedded_async() as service:
            assert (await service.server()).version == "1"
            raise KeyError("inside")

    with pytest.raises(KeyError, match="inside"):
        asyncio.run(use())
    assert not Path(stand_in[0]).exists()
