"""LoadService: what this server can do and is doing."""

# ruff: noqa: N802 (methods carry the names of the contract)
from __future__ import annotations

import asyncio
import datetime as dt

from nearchord.v1 import load_service_pb2 as pb
from nearchord.v1 import load_service_pb2_grpc

from nearchord_service.api.auth import Context
from nearchord_service.api.calls import Calls
from nearchord_service.api.convert.load import from_caps, from_load, to_interval
from nearchord_service.api.limits import Caps
from nearchord_service.api.watch import Hub
from nearchord_service.metrics import Metrics

LOAD_KEY = "load"
"""What streams of figures follow in the hub: nothing in the store has this id, so only a drain wakes them."""


class LoadServicer(load_service_pb2_grpc.LoadServiceServicer):
    """Shows the figures of the metrics."""

    def __init__(self, calls: Calls, caps: Caps, metrics: Metrics, hub: Hub, version: str, solver: str) -> None:
        self._calls = calls
        self._caps = caps
        self._metrics = metrics
        self._hub = hub
        self._versions = version, solver

    async def GetServer(self, request: pb.GetServerRequest, context: Context) -> pb.GetServerResponse:
        """Say version, questions and caps."""
        return from_caps(*self._versions, self._caps)

    async def WatchLoad(self, request: pb.WatchLoadRequest, context: Context) -> None:
        """Stream figures until the caller leaves."""
        interval = to_interval(request)
        loop = asyncio.get_running_loop()
        with self._hub.watcher(LOAD_KEY) as watcher:
            due = loop.time()
            while True:
                load = await self._calls.quick(self._metrics.load)
                await context.write(from_load(load, dt.datetime.now(dt.UTC)))
                due = max(due + interval, loop.time())
                await watcher.changed(due - loop.time())
