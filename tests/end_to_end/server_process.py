"""A server as its users start it: a process of its own over loopback."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
import threading
from pathlib import Path
from types import TracebackType

import grpc

ROOT = Path(__file__).resolve().parents[2]
DEADLINE = 240.0
"""Seconds until a test gives up; a first start compiles the kernels."""

_LINE = re.compile(r"nearchord accepts calls on (\S+), metrics (?:on (\S+)|off), data in (.+)\n")


def environment() -> dict[str, str]:
    """Return the environment of a server: the sources of this repository come first."""
    paths = [str(ROOT / "client"), str(ROOT / "service"), os.environ.get("PYTHONPATH", "")]
    kept = {name: value for name, value in os.environ.items() if not name.startswith("NEARCHORD_")}
    return kept | {"PYTHONPATH": os.pathsep.join(filter(None, paths))}


def run_to_end(*options: str) -> tuple[int, str, str]:
    """Start a server that is expected to end by itself; returns exit code, output and errors."""
    ended = subprocess.run(
        [sys.executable, "-m", "nearchord_service", *options],
        env=environment(),
        capture_output=True,
        text=True,
        timeout=DEADLINE,
        check=False,
    )
    return ended.returncode, ended.stdout, ended.stderr


class ServerProcess:
    """A running server; ends with the block, killed if need be."""

    def __init__(self, data: Path, *options: str) -> None:
        self.data = data
        command = [sys.executable, "-m", "nearchord_service", "--data", str(data), "--listen", "127.0.0.1:0"]
        if "--metrics" not in options:
            command += ["--metrics", "127.0.0.1:0"]
        self.process = subprocess.Popen(
            [*command, *options],
            env=environment(),
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        self._errors: list[str] = []
        self._reader = threading.Thread(target=self._read_errors, daemon=True)
        self._reader.start()

    def _read_errors(self) -> None:
        assert self.process.stderr is not None
        self._errors.extend(self.process.stderr)

    @property
    def errors(self) -> str:
        """What the server has logged so far; all of it once it has ended."""
        if self.process.poll() is not None:
            self._reader.join(DEADLINE)
        return "".join(self._errors)

    def __enter__(self) -> ServerProcess:
        assert self.process.stdout is not None
        watchdog = threading.Timer(DEADLINE, self.process.kill)
        watchdog.start()
        self.line = self.process.stdout.readline()
        watchdog.cancel()
        found = _LINE.fullmatch(self.line)
        if found is None:
            self.process.kill()
            self.process.wait()
            raise AssertionError(f"no line that says ready: {self.line!r}\n{self.errors}")
        self.address, self.metrics_address, self.said_data = found.groups()
        self.channel = grpc.insecure_channel(self.address)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.channel.close()
        if self.process.poll() is None:
            self.process.kill()
        self.process.wait(DEADLINE)
        self._reader.join(DEADLINE)
        for stream in (self.process.stdin, self.process.stdout, self.process.stderr):
            if stream is not None:
                stream.close()

    def signal(self, number: signal.Signals) -> None:
        """Send a signal to the server."""
        self.process.send_signal(number)

    def ended(self) -> int:
        """Wait for the end and return the exit code."""
        return self.process.wait(DEADLINE)

    def children(self) -> set[int]:
        """Return the process ids of everything that the server started, however deep."""
        found: set[int] = set()
        front = {self.process.pid}
        while front:
            front = {pid for parent in front for pid in _children(parent)} - found
            found |= front
        return found


def _children(parent: int) -> set[int]:
    found: set[int] = set()
    for task in Path(f"/proc/{parent}/task").glob("*/children"):
        try:
            found.update(map(int, task.read_text().split()))
        except FileNotFoundError:
            continue
    return found


def alive(pid: int) -> bool:
    """Tell whether a process runs (one that has ended and waits to be collected does not)."""
    try:
        return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] not in "ZX"
    except FileNotFoundError:
        return False
