"""Around every call: its duration and status are counted, its errors become statuses, defects are logged."""

from __future__ import annotations

import logging
import time
from collections.abc import Awaitable, Callable
from typing import Any, TypeAlias

import grpc

from nearchord_service.api import pieces
from nearchord_service.api.errors import to_status
from nearchord_service.metrics import Metrics
from nearchord_service.model.errors import ServiceError

_log = logging.getLogger(__name__)
_OURS = "/nearchord.v1."

Handler: TypeAlias = "grpc.RpcMethodHandler[Any, Any]"
Continuation: TypeAlias = "Callable[[grpc.HandlerCallDetails], Awaitable[Handler | None]]"
Behaviour = Callable[[Any, Any], Awaitable[Any]]

_MAKERS: dict[tuple[bool, bool], Callable[..., Any]] = {
    (False, False): grpc.unary_unary_rpc_method_handler,
    (False, True): grpc.unary_stream_rpc_method_handler,
    (True, False): grpc.stream_unary_rpc_method_handler,
}

_READERS = {"GraphService/StoreContent": pieces.read}
"""Methods whose requests are read in another way than the generated one."""


class Interceptor(grpc.aio.ServerInterceptor):
    """Wraps the handlers of our own services; health and reflection stay as they are.

    Handlers are coroutines; those that stream write to the context.
    """

    def __init__(self, metrics: Metrics) -> None:
        self._metrics = metrics
        self._wrapped: dict[str, Handler] = {}

    async def intercept_service(self, continuation: Continuation, details: grpc.HandlerCallDetails) -> Handler | None:
        """Return the handler of a method, wrapped once and kept."""
        method = str(details.method)
        kept = self._wrapped.get(method)
        if kept is not None:
            return kept
        handler = await continuation(details)
        if handler is None or not method.startswith(_OURS):
            return handler
        wrapped = self._wrapped[method] = self._wrap(method.removeprefix(_OURS), handler)
        return wrapped

    def _wrap(self, method: str, handler: Handler) -> Handler:
        streams = bool(handler.request_streaming), bool(handler.response_streaming)
        behaviour: Any = {
            (False, False): handler.unary_unary,
            (False, True): handler.unary_stream,
            (True, False): handler.stream_unary,
        }[streams]
        make = _MAKERS[streams]
        wrapped: Handler = make(
            self._guard(method, behaviour),
            request_deserializer=_READERS.get(method, handler.request_deserializer),
            response_serializer=handler.response_serializer,
        )
        return wrapped

    def _guard(self, method: str, behaviour: Behaviour) -> Behaviour:
        async def guarded(request: Any, context: Any) -> Any:
            begun = time.perf_counter()
            code = grpc.StatusCode.CANCELLED
            try:
                response = await behaviour(request, context)
                code = grpc.StatusCode.OK
                return response
            except Exception as error:
                if context.done():
                    return None
                if not isinstance(error, ServiceError):
                    _log.exception("%s failed", method)
                code, message, trailers = to_status(error)
                await context.abort(code, message, trailers)
            finally:
                self._metrics.call_ended(method, code.name, time.perf_counter() - begun)

        return guarded
