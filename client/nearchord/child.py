"""A private service as a child process, for the length of a block."""

from __future__ import annotations

import asyncio
import re
import subprocess
import sys
import tempfile
import threading
from collections import deque
from collections.abc import AsyncIterator, Callable, Iterator
from contextlib import ExitStack, asynccontextmanager, contextmanager
from os import PathLike

from nearchord.errors import EmbeddedFailed
from nearchord.session.aio import AsyncService, connect_async
from nearchord.session.sync import Service, connect

START_SECONDS = 60.0
GRACE_SECONDS = 10.0
KEPT_LINES = 40
ACCEPTS = re.compile(r"accepts calls on (?P<target>[^\s,]+)")
MISSING = re.compile(r"ModuleNotFoundError: No module named '(?P<module>[^']+)'")
OnLine = Callable[[str], None]


@contextmanager
def embedded(
    data: str | PathLike[str] | None = None, workers: int | None = None, on_line: OnLine | None = None
) -> Iterator[Service]:
    """A private service for the block; needs the extra `service`.

    `data`: its data folder (default: a temporary one, removed at the end). `workers`: worker processes (default: the
    service's own choice). `on_line` is called with every line of the service's log, from another thread.
    EmbeddedFailed when it does not start.
    """
    with ExitStack() as stack:
        child = stack.enter_context(_child(data, workers, on_line))
        yield stack.enter_context(connect(child.start()))


@asynccontextmanager
async def embedded_async(
    data: str | PathLike[str] | None = None, workers: int | None = None, on_line: OnLine | None = None
) -> AsyncIterator[AsyncService]:
    """Like `embedded`, for a running event loop."""
    manager = _child(data, workers, on_line)
    child = await asyncio.to_thread(manager.__enter__)
    try:
        async with connect_async(await asyncio.to_thread(child.start)) as service:
            yield service
    finally:
        await asyncio.to_thread(manager.__exit__, None, None, None)


@contextmanager
def _child(data: str | PathLike[str] | None, workers: int | None, on_line: OnLine | None) -> Iterator[Child]:
    with ExitStack() as stack:
        folder = stack.enter_context(tempfile.TemporaryDirectory(prefix="nearchord-")) if data is None else str(data)
        child = Child(command(folder, workers), on_line)
        stack.callback(child.stop)
        yield child


def command(folder: str, workers: int | None) -> list[str]:
    """The command line of a private service."""
    words = [sys.executable, "-m", "nearchord_service", "--data", folder, "--listen", "127.0.0.1:0"]
    words += ["--metrics", "none", "--exit-on-stdin-close"]
    return words if workers is None else [*words, "--workers", str(workers)]


class Child:
    """The child process; it also ends by itself when its standard input closes, that is, when this process dies."""

    def __init__(
        self,
        words: list[str],
        on_line: OnLine | None = None,
        *,
        start_seconds: float = START_SECONDS,
        grace_seconds: float = GRACE_SECONDS,
    ) -> None:
        self._words, self._on_line = words, on_line
        self._start_seconds, self._grace_seconds = start_seconds, grace_seconds
        self._process: subprocess.Popen[str] | None = None
        self._threads: list[threading.Thread] = []
        self._log: deque[str] = deque(maxlen=KEPT_LINES)
        self._spoke = threading.Event()
        self._line = ""

    def start(self) -> str:
        """Starts it; returns its address once it accepts calls."""
        pipe = subprocess.PIPE
        self._process = subprocess.Popen(  # its own session: Ctrl-C reaches this process only, which then ends it
            self._words, stdin=pipe, stdout=pipe, stderr=pipe, text=True, errors="replace", start_new_session=True
        )
        for reader in (self._read_line, self._read_log):
            thread = threading.Thread(target=reader, args=(self._process,), daemon=True)
            thread.start()
            self._threads.append(thread)
        self._spoke.wait(self._start_seconds)
        match = ACCEPTS.search(self._line)
        if match is None:
            raise self._failure()
        return match["target"]

    def stop(self) -> None:
        """Ends it: asks, waits for the grace period, then kills. A second time, or before a start, is harmless."""
        process, self._process = self._process, None
        if process is None:
            return
        process.terminate()
        try:
            process.wait(self._grace_seconds)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()
        for thread in self._threads:
            thread.join()
        for stream in (process.stdin, process.stdout, process.stderr):
            if stream is not None:
                stream.close()

    def _read_line(self, process: subprocess.Popen[str]) -> None:
        assert process.stdout is not None
        self._line = process.stdout.readline()
        self._spoke.set()
        for _ in process.stdout:  # nothing more is promised, but a full pipe would block the service
            pass

    def _read_log(self, process: subprocess.Popen[str]) -> None:
        assert process.stderr is not None
        for line in process.stderr:
            self._log.append(line.rstrip("\n"))
            if self._on_line is not None:
                self._on_line(line.rstrip("\n"))

    def _failure(self) -> EmbeddedFailed:
        """Why it does not accept calls."""
        process = self._process
        assert process is not None
        late = not self._spoke.is_set()
        self.stop()
        log = "\n".join(self._log)
        missing = MISSING.search(log)
        if missing is not None:
            return EmbeddedFailed(
                f"a private service needs {missing['module']}, which is not installed; "
                'install the service extra: pip install "nearchord[service]"',
                reason="EXTRA_MISSING",
            )
        what = f"said nothing for {self._start_seconds:g} seconds" if late else f"ended with code {process.returncode}"
        return EmbeddedFailed(f"the private service {what}; its last words:\n{log or '(none)'}", reason="NOT_STARTED")
