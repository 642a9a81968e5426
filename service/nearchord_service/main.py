"""Puts the rooms together, starts them in order, and stops them in the opposite order.

A server is ready in well under a second: it accepts calls while its workers still warm up, and jobs wait meanwhile.
"""

from __future__ import annotations

import asyncio
import logging
import os
import platform
import re
import signal
import sys
import threading
from collections.abc import Callable, Sequence
from contextlib import AsyncExitStack, suppress
from importlib import metadata
from importlib.util import find_spec
from pathlib import Path

from prometheus_client import CollectorRegistry

from nearchord_service.api.server import ApiServer, Versions
from nearchord_service.dispatch import Dispatcher, Upkeep
from nearchord_service.metrics import Exposition, Metrics
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.settings import Address, Settings, read_settings
from nearchord_service.store.sql import SqlStore
from nearchord_service.work.local import LocalExecutor

_log = logging.getLogger(__name__)

HOLDER = "server"
"""Who holds the leases. A data folder belongs to one server, so whatever is leased at a start is its own."""

KEPT = "kept"
"""Folder in the data folder for what speeds up later jobs; it may be deleted at any time."""

EXIT_FAILED = 1
_STDIN = 0


class Server:
    """One server from start to end, on one event loop."""

    def __init__(self, settings: Settings) -> None:
        self._settings = settings
        self._metrics = Metrics(CollectorRegistry())
        self._store = SqlStore(settings.data, on_write=self._metrics.database_write, on_end=self._metrics.job_ended)
        self._executor = LocalExecutor(
            settings.workers,
            keep_folder=settings.data / KEPT if settings.kept_bytes else None,
            keep_bytes=settings.kept_bytes,
        )
        self._dispatcher = Dispatcher(self._store, self._executor, holder=HOLDER, observer=self._metrics)
        self._upkeep = Upkeep(self._store, retention=settings.retention, observer=self._metrics)
        self._versions = Versions(service_version(), solver_version())

    async def run(self, ready: Callable[[str], None], ended: asyncio.Event) -> None:
        """Start, say so, and stop when told to. Raises StoreUnavailable or OSError when a part cannot start."""
        async with AsyncExitStack() as parts:
            await asyncio.to_thread(self._store.start)
            parts.push_async_callback(asyncio.to_thread, self._store.stop)
            self._metrics.observe(
                self._store.figures,
                self._executor.figures,
                {
                    "version": self._versions.service,
                    "solver_version": self._versions.solver,
                    "python_version": platform.python_version(),
                },
            )
            metrics_at = self._start_exposition(parts)
            grace = self._settings.grace
            parts.push_async_callback(asyncio.to_thread, self._dispatcher.stop, grace)
            await asyncio.to_thread(self._dispatcher.start)
            parts.push_async_callback(asyncio.to_thread, self._upkeep.stop)
            self._upkeep.start()
            api = ApiServer(self._settings, self._store, self._metrics, self._versions)
            parts.push_async_callback(api.stop, grace)
            port = await api.start()
            ready(ready_line(Address(self._settings.listen.host, port), metrics_at, self._settings.data))
            await ended.wait()
            _log.info("shutting down: calls and workers have %g seconds to end", grace)
            # Calls and workers use their grace at the same time; the stack stops them once more, which does nothing.
            await asyncio.gather(api.stop(grace), asyncio.to_thread(self._dispatcher.stop, grace))

    def _start_exposition(self, parts: AsyncExitStack) -> Address | None:
        wanted = self._settings.metrics
        if wanted is None:
            return None
        exposition = Exposition(self._metrics.registry, wanted.host, wanted.port)
        try:
            exposition.start()
        except OSError as error:
            raise OSError(f"cannot serve metrics on {wanted}: {error}; choose another with --metrics") from error
        parts.push_async_callback(asyncio.to_thread, exposition.stop)
        return Address(wanted.host, exposition.port)


def ready_line(listen: Address, metrics_at: Address | None, data: Path) -> str:
    """Return the one line that a server prints."""
    shown = "off" if metrics_at is None else f"on {metrics_at}"
    return f"nearchord accepts calls on {listen}, metrics {shown}, data in {data}"


def service_version() -> str:
    """Return the version of the installed distribution."""
    try:
        return metadata.version("nearchord")
    except metadata.PackageNotFoundError:
        return "0+source"


def solver_version() -> str:
    """Return the version of the solver without importing it: its kernels belong to the workers."""
    found = find_spec("nearchord_solve")
    source = Path(found.origin).read_text(encoding="utf-8") if found and found.origin else ""
    version = re.search(r'^VERSION = "(.+)"$', source, re.MULTILINE)
    return version[1] if version else ""


def _announce(line: str) -> None:
    sys.stdout.write(line + "\n")
    sys.stdout.flush()


def _end_at_once() -> None:
    # Workers notice that their parent is gone; the store recovers what was committed.
    os._exit(EXIT_FAILED)


def _watch_signals(ended: asyncio.Event) -> None:
    """Let the first SIGTERM or SIGINT drain the server and the second one end it at once."""
    loop = asyncio.get_running_loop()

    def told() -> None:
        if ended.is_set():
            _end_at_once()
        ended.set()

    for number in (signal.SIGTERM, signal.SIGINT):
        loop.add_signal_handler(number, told)


def _watch_stdin(ended: asyncio.Event) -> None:
    """Let the end of standard input drain the server: whoever started it is gone."""
    loop = asyncio.get_running_loop()

    def wait_for_end() -> None:
        with suppress(OSError):
            while os.read(_STDIN, 4_096):
                pass
        if not loop.is_closed():
            loop.call_soon_threadsafe(ended.set)

    threading.Thread(target=wait_for_end, name="stdin-watch", daemon=True).start()


async def _serve(settings: Settings) -> None:
    ended = asyncio.Event()
    _watch_signals(ended)
    if settings.exit_on_stdin_close:
        _watch_stdin(ended)
    await Server(settings).run(_announce, ended)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a server until it is told to end; returns the exit code."""
    settings = read_settings(sys.argv[1:] if arguments is None else arguments, os.environ)
    logging.basicConfig(
        stream=sys.stderr, level=settings.log_level, format="%(asctime)s %(levelname)s %(name)s: %(message)s"
    )
    try:
        asyncio.run(_serve(settings))
    except (StoreUnavailable, OSError) as error:
        _log.debug("the start failed", exc_info=True)
        sys.stderr.write(f"nearchord cannot start: {error}\n")
        return EXIT_FAILED
    return 0
