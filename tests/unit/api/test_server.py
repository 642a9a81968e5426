"""The server around its services: health, reflection, draining, defects, its port."""

from __future__ import annotations

import threading
from collections.abc import Callable
from typing import Any

import grpc
import pytest
from grpc_health.v1 import health_pb2, health_pb2_grpc
from grpc_reflection.v1alpha import reflection_pb2, reflection_pb2_grpc
from nearchord.v1 import job_service_pb2 as pb
from nearchord.v1 import load_service_pb2
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.settings import Address
from nearchord_service.store.sql import SqlStore
from unit.api.serving import DEADLINE, Serving, a_spec, failure, wait_until


def test_health_is_told_by_service(served: Serving) -> None:
    stub = health_pb2_grpc.HealthStub(served.channel)
    for name in ("", "nearchord.v1.GraphService", "nearchord.v1.JobService", "nearchord.v1.LoadService"):
        found = stub.Check(health_pb2.HealthCheckRequest(service=name))
        assert found.status == health_pb2.HealthCheckResponse.SERVING
    with pytest.raises(grpc.RpcError) as caught:
        stub.Check(health_pb2.HealthCheckRequest(service="nobody"))
    assert caught.value.code() is grpc.StatusCode.NOT_FOUND


def reflected(served: Serving) -> set[str]:
    stub = reflection_pb2_grpc.ServerReflectionStub(served.channel)
    request = reflection_pb2.ServerReflectionRequest(list_services="")
    (response,) = stub.ServerReflectionInfo(iter([request]))
    return {service.name for service in response.list_services_response.service}


def test_services_are_described(served: Serving) -> None:
    assert {"nearchord.v1.GraphService", "nearchord.v1.JobService", "nearchord.v1.LoadService"} <= reflected(served)


def test_descriptions_can_be_switched_off(serve: Callable[..., Serving]) -> None:
    with pytest.raises(grpc.RpcError) as caught:
        reflected(serve(reflection=False))
    assert caught.value.code() is grpc.StatusCode.UNIMPLEMENTED


def test_a_drain_sends_watchers_away_with_a_hint(served: Serving) -> None:
    """Watches end with UNAVAILABLE and DRAINING after all that is known; health says NOT_SERVING before."""
    job = served.submit()
    batch = served.submit_batch([a_spec()]).batch
    health = health_pb2_grpc.HealthStub(served.channel).Watch(health_pb2.HealthCheckRequest())
    assert next(health).status == health_pb2.HealthCheckResponse.SERVING
    streams = [
        served.jobs.WatchJob(pb.WatchJobRequest(job_id=job.id)),
        served.jobs.WatchBatch(pb.WatchBatchRequest(batch_id=batch.id)),
        served.load.WatchLoad(load_service_pb2.WatchLoadRequest(interval_seconds=60)),
    ]
    for stream in streams:
        next(stream)
    streams.append(served.jobs.ReadBatchAnswers(pb.ReadBatchAnswersRequest(batch_id=batch.id, wait=True)))
    figure = served.metrics.registry.get_sample_value
    wait_until(lambda: figure("nearchord_watch_streams") == 2)
    drain = threading.Thread(target=served.drain, args=(1.0,))
    drain.start()
    assert next(health).status == health_pb2.HealthCheckResponse.NOT_SERVING
    for stream in streams:
        found = failure(lambda stream=stream: stream)
        assert found.summary == ("UNAVAILABLE", "DRAINING")
        assert found.retry_seconds == 1.0
    health.cancel()
    drain.join(DEADLINE)
    assert not drain.is_alive()


def test_a_second_stop_is_harmless(served: Serving) -> None:
    served.drain()
    served.drain()


class FailingStore(SqlStore):
    """Fails in ways a test chooses."""

    fault: Exception = RuntimeError("the secret inside")

    def job(self, owner: str, job_id: str) -> Any:
        raise self.fault


def test_a_defect_is_logged_and_told_without_details(
    serve: Callable[..., Serving], caplog: pytest.LogCaptureFixture
) -> None:
    served = serve(FailingStore)
    found = failure(lambda: served.jobs.GetJob(pb.GetJobRequest(job_id="x")))
    assert found.summary == ("INTERNAL", "INTERNAL")
    assert "secret" not in found.message
    assert any("JobService/GetJob failed" in r.message and r.exc_info for r in caplog.records)


def test_a_store_that_fails_is_unavailable(serve: Callable[..., Serving], monkeypatch: pytest.MonkeyPatch) -> None:
    served = serve(FailingStore)
    monkeypatch.setattr(served.store, "fault", StoreUnavailable("the disk is full; free some"))
    found = failure(lambda: served.jobs.GetJob(pb.GetJobRequest(job_id="x")))
    assert found.summary == ("UNAVAILABLE", "STORE_UNAVAILABLE")
    assert found.message == "the disk is full; free some"
    assert found.retry_seconds == 1.0


def test_a_port_has_one_server(served: Serving, serve: Callable[..., Serving]) -> None:
    with pytest.raises(OSError, match=f"cannot listen on 127.0.0.1:{served.port}"):
        serve(listen=Address("127.0.0.1", served.port))
