"""The gRPC server: options, services, health, reflection, and how it drains."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from dataclasses import dataclass

import grpc
from grpc_health.v1 import health, health_pb2, health_pb2_grpc
from grpc_reflection.v1alpha import reflection
from nearchord.v1 import (
    graph_service_pb2,
    graph_service_pb2_grpc,
    job_service_pb2,
    job_service_pb2_grpc,
    load_service_pb2,
    load_service_pb2_grpc,
)

from nearchord_service.api.calls import Calls
from nearchord_service.api.graphs import GraphServicer
from nearchord_service.api.intercept import Interceptor
from nearchord_service.api.jobs import JobServicer
from nearchord_service.api.limits import MESSAGE_BYTES, Caps
from nearchord_service.api.loads import LoadServicer
from nearchord_service.api.watch import Hub
from nearchord_service.metrics import Metrics
from nearchord_service.settings import Settings
from nearchord_service.store.port import Store

SERVICES = (
    graph_service_pb2.DESCRIPTOR.services_by_name["GraphService"].full_name,
    job_service_pb2.DESCRIPTOR.services_by_name["JobService"].full_name,
    load_service_pb2.DESCRIPTOR.services_by_name["LoadService"].full_name,
)

OPTIONS: tuple[tuple[str, int], ...] = (
    # Without this a second server on the same port would silently share it.
    ("grpc.so_reuseport", 0),
    ("grpc.max_receive_message_length", MESSAGE_BYTES),
    ("grpc.max_send_message_length", MESSAGE_BYTES),
    # Clients ping every minute; a ping more often than every half minute is a fault of the client.
    ("grpc.http2.min_ping_interval_without_data_ms", 30_000),
    ("grpc.keepalive_permit_without_calls", 1),
    # Our own pings find watchers whose machine is gone.
    ("grpc.keepalive_time_ms", 60_000),
    ("grpc.keepalive_timeout_ms", 20_000),
    # Connections are renewed, so that clients spread over servers; streams under way get time to end.
    ("grpc.max_connection_age_ms", 30 * 60_000),
    ("grpc.max_connection_age_grace_ms", 10 * 60_000),
)


@dataclass(frozen=True)
class Versions:
    """Versions of the service and of its solver."""

    service: str
    solver: str


class ApiServer:
    """Accepts calls on one address. All methods belong to one event loop."""

    def __init__(self, settings: Settings, store: Store, metrics: Metrics, versions: Versions) -> None:
        self._settings = settings
        self._store = store
        self._hub = Hub()
        self._calls = Calls()
        self._health = health.aio.HealthServicer()
        self._server = grpc.aio.server(interceptors=(Interceptor(metrics),), options=OPTIONS)
        caps = Caps.of(settings)
        self._graphs = GraphServicer(store, self._calls, caps, metrics)
        jobs = JobServicer(store, self._calls, caps, metrics, self._hub)
        loads = LoadServicer(self._calls, caps, metrics, self._hub, versions.service, versions.solver)
        graph_service_pb2_grpc.add_GraphServiceServicer_to_server(self._graphs, self._server)  # type: ignore[no-untyped-call]
        job_service_pb2_grpc.add_JobServiceServicer_to_server(jobs, self._server)  # type: ignore[no-untyped-call]
        load_service_pb2_grpc.add_LoadServiceServicer_to_server(loads, self._server)  # type: ignore[no-untyped-call]
        health_pb2_grpc.add_HealthServicer_to_server(self._health, self._server)
        if settings.reflection:
            names = (*SERVICES, health.SERVICE_NAME, reflection.SERVICE_NAME)
            reflection.enable_server_reflection(names, self._server)
        self._unsubscribe: Callable[[], None] = lambda: None
        self._stopped = False

    async def start(self) -> int:
        """Accept calls; returns the port. Raises OSError when the address cannot be taken."""
        try:
            port = self._server.add_insecure_port(str(self._settings.listen))
        except RuntimeError as error:
            raise OSError(
                f"cannot listen on {self._settings.listen}, which is in use or not of this machine; "
                "choose another with --listen"
            ) from error
        self._unsubscribe = self._store.subscribe(self._hub.heard)
        await self._server.start()
        for name in ("", *SERVICES):
            await self._health.set(name, health_pb2.HealthCheckResponse.SERVING)
        return port

    async def stop(self, grace_seconds: float) -> None:
        """Drain: say NOT_SERVING, send watchers away with a hint to resume, let other calls end within the grace.

        Safe to repeat, and before `start`.
        """
        if self._stopped:
            return
        self._stopped = True
        await self._health.enter_graceful_shutdown()
        self._hub.drain()
        await self._server.stop(grace_seconds)
        self._unsubscribe()
        await self._graphs.settle()
        await asyncio.to_thread(self._calls.close)
