"""Serves /metrics over HTTP, in a thread of its own."""

from __future__ import annotations

import threading
from wsgiref.simple_server import WSGIServer

from prometheus_client import CollectorRegistry, start_http_server


class Exposition:
    """The page that Prometheus scrapes."""

    def __init__(self, registry: CollectorRegistry, host: str, port: int) -> None:
        self._registry = registry
        self._host = host
        self._wanted = port
        self._running: tuple[WSGIServer, threading.Thread] | None = None

    def start(self) -> None:
        """Listen; raises OSError when the address cannot be taken."""
        self._running = start_http_server(self._wanted, self._host, self._registry)

    @property
    def port(self) -> int:
        """The port listened on."""
        return self._running[0].server_port if self._running else self._wanted

    def stop(self) -> None:
        """Stop listening. Safe to repeat, and before `start`."""
        if self._running is None:
            return
        server, thread = self._running
        self._running = None
        server.shutdown()
        thread.join()
        server.server_close()
