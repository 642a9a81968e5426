"""The generated stubs of a channel, by method; they serve both gRPC stacks."""

from __future__ import annotations

from typing import Any

from nearchord.session.steps import Method
from nearchord.session.wire import serialized
from nearchord.v1 import graph_service_pb2, graph_service_pb2_grpc, job_service_pb2_grpc, load_service_pb2_grpc

_GRAPHS = graph_service_pb2.DESCRIPTOR.services_by_name["GraphService"]


def stubs_of(channel: Any) -> dict[Method, Any]:
    """Every callable of the contract on a channel; StoreContent takes requests also as their bytes."""
    stubs: dict[str, Any] = {
        "graph": graph_service_pb2_grpc.GraphServiceStub(channel),  # type: ignore[no-untyped-call]
        "job": job_service_pb2_grpc.JobServiceStub(channel),  # type: ignore[no-untyped-call]
        "load": load_service_pb2_grpc.LoadServiceStub(channel),  # type: ignore[no-untyped-call]
    }
    calls = {method: getattr(stubs[method.value[0]], method.value[1]) for method in Method}
    calls[Method.STORE_CONTENT] = channel.stream_unary(
        f"/{_GRAPHS.full_name}/{Method.STORE_CONTENT.value[1]}",
        request_serializer=serialized,
        response_deserializer=graph_service_pb2.StoreContentResponse.FromString,
    )
    return calls
