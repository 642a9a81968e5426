"""The server as a process: its first line, its answers, its figures, its ends."""

from __future__ import annotations

import signal
import socket
import struct
import threading
from collections.abc import Callable, Iterator
from pathlib import Path
from urllib.request import urlopen

import grpc
import pytest
from end_to_end.server_process import DEADLINE, ServerProcess, alive, run_to_end
from grpc_health.v1 import health_pb2, health_pb2_grpc
from nearchord.v1 import job_pb2, job_service_pb2, job_service_pb2_grpc, load_service_pb2, load_service_pb2_grpc
from prometheus_client.parser import text_string_to_metric_families

CYCLE = struct.pack("<IQ6Q5I", 5, 5, 0, 2, 3, 4, 5, 5, 1, 4, 2, 3, 4)
"""A cycle on five vertices."""

WEIGHTS = (3, 1, 4, 1, 5)
HEAVIEST = 4 + 5
"""Vertices 2 and 4; no other two that are not neighbours weigh more, and three always hold two neighbours."""


def submit(server: ServerProcess, request_id: str) -> str:
    spec = job_pb2.JobSpec(label="cycle")
    spec.input.graph_content = CYCLE
    spec.input.weights_content = struct.pack("<5q", *WEIGHTS)
    spec.question.independent_set.SetInParent()
    request = job_service_pb2.SubmitJobRequest(request_id=request_id, spec=spec)
    return job_service_pb2_grpc.JobServiceStub(server.channel).SubmitJob(request, timeout=DEADLINE).job.id


def watch(server: ServerProcess, job_id: str, after: int = 0) -> Iterator[job_pb2.Event]:
    request = job_service_pb2.WatchJobRequest(job_id=job_id, after_sequence=after)
    stub = job_service_pb2_grpc.JobServiceStub(server.channel)
    return (response.event for response in stub.WatchJob(request, timeout=DEADLINE))


def answer(server: ServerProcess, job_id: str) -> tuple[job_pb2.Verdict, int, tuple[int, ...]]:
    *_, last = watch(server, job_id)
    assert last.transition.stage == job_pb2.STAGE_DONE
    request = job_service_pb2.ReadAnswerRequest(job_id=job_id)
    stub = job_service_pb2_grpc.JobServiceStub(server.channel)
    head, *columns = (response.part for response in stub.ReadAnswer(request, timeout=DEADLINE))
    chosen = b"".join(part.column.data for part in columns if part.column.name == "chosen")
    return head.head.verdict, head.head.value.numerator, struct.unpack(f"<{len(chosen) // 4}I", chosen)


@pytest.fixture(scope="module")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[ServerProcess]:
    with ServerProcess(tmp_path_factory.mktemp("data"), "--workers", "1") as running:
        yield running


def test_the_first_line_says_where(server: ServerProcess) -> None:
    host, _, port = server.address.partition(":")
    assert host == "127.0.0.1"
    assert int(port) > 0
    assert server.metrics_address not in (None, server.address)
    assert server.said_data == str(server.data)


def test_a_job_is_answered(server: ServerProcess) -> None:
    assert answer(server, submit(server, "answered")) == (job_pb2.VERDICT_PROVEN, HEAVIEST, (2, 4))


def test_kernels_stay_out_of_the_server(server: ServerProcess) -> None:
    """The compiler's library is mapped in the workers' processes, not in the one that serves."""
    assert answer(server, submit(server, "kernels"))[0] == job_pb2.VERDICT_PROVEN
    assert "llvmlite" not in Path(f"/proc/{server.process.pid}/maps").read_text()
    assert any("llvmlite" in Path(f"/proc/{pid}/maps").read_text() for pid in server.children())


def test_the_page_and_the_stream_show_the_same_figures(server: ServerProcess) -> None:
    assert answer(server, submit(server, "figures"))[0] == job_pb2.VERDICT_PROVEN

    def same() -> bool:
        stub = load_service_pb2_grpc.LoadServiceStub(server.channel)
        stream = stub.WatchLoad(load_service_pb2.WatchLoadRequest(), timeout=DEADLINE)
        live = next(stream)
        stream.cancel()
        with urlopen(f"http://{server.metrics_address}/metrics") as page:
            families = text_string_to_metric_families(page.read().decode())
            shown = {(s.name, *sorted(s.labels.values())): s.value for f in families for s in f.samples}
        (line,) = live.questions
        return live.finished >= 1 and [live.submitted, live.finished, line.finished, live.slots.idle] == [
            shown["nearchord_jobs_submitted_total", "independent-set"],
            shown["nearchord_jobs_finished_total", "PROVEN", "independent-set"],
            shown["nearchord_jobs_finished_total", "PROVEN", "independent-set"],
            shown["nearchord_slots", "idle"],
        ]

    wait_until(same)


def wait_until(condition: Callable[[], bool]) -> None:
    pause = threading.Event()
    for _ in range(int(DEADLINE / 0.05)):
        if condition():
            return
        pause.wait(0.05)
    raise AssertionError("it did not come to it before the deadline")


def test_a_data_folder_has_one_server(server: ServerProcess) -> None:
    code, output, errors = run_to_end("--data", str(server.data), "--listen", "127.0.0.1:0", "--metrics", "none")
    assert (code, output) == (1, "")
    assert errors.splitlines()[-1].startswith("nearchord cannot start: ")
    assert str(server.data) in errors


@pytest.mark.parametrize("option", ["--listen", "--metrics"])
def test_an_address_in_use_is_named(tmp_path: Path, option: str) -> None:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        address = f"127.0.0.1:{taken.getsockname()[1]}"
        options = {"--listen": "127.0.0.1:0", "--metrics": "127.0.0.1:0", option: address}
        arguments = [word for pair in options.items() for word in pair]
        code, output, errors = run_to_end("--data", str(tmp_path / "data"), *arguments)
    assert (code, output) == (1, "")
    assert f"{address}" in errors.splitlines()[-1]
    assert f"choose another with {option}" in errors.splitlines()[-1]
    assert "Traceback" not in errors


def test_a_wrong_option_is_named(tmp_path: Path) -> None:
    code, output, errors = run_to_end("--data", str(tmp_path), "--workers", "none")
    assert (code, output) == (2, "")
    assert "argument --workers" in errors


def test_metrics_can_be_switched_off(tmp_path: Path) -> None:
    with ServerProcess(tmp_path, "--metrics", "none") as server:
        assert server.metrics_address is None


def test_a_drained_server_gives_its_jobs_to_the_next(tmp_path: Path) -> None:
    """A job accepted before its workers were warm is answered after a restart; its watcher is told to resume."""
    with ServerProcess(tmp_path, "--workers", "1") as first:
        job_id = submit(first, "survivor")
        events = watch(first, job_id)
        seen = next(events)
        workers = first.children()
        first.signal(signal.SIGTERM)
        with pytest.raises(grpc.RpcError) as caught:
            list(events)
        assert caught.value.code() is grpc.StatusCode.UNAVAILABLE
        assert "resume from the last number" in caught.value.details()
        assert first.ended() == 0
        assert not [pid for pid in workers if alive(pid)]
        assert "Traceback" not in first.errors
    with ServerProcess(tmp_path, "--workers", "1") as second:
        *_, last = watch(second, job_id, seen.sequence)
        assert last.transition.verdict == job_pb2.VERDICT_PROVEN
        assert answer(second, job_id) == (job_pb2.VERDICT_PROVEN, HEAVIEST, (2, 4))


def test_the_end_of_standard_input_can_end_the_server(tmp_path: Path) -> None:
    with ServerProcess(tmp_path, "--exit-on-stdin-close") as server:
        assert server.process.stdin is not None
        server.process.stdin.close()
        assert server.ended() == 0


def test_a_second_signal_ends_at_once(tmp_path: Path) -> None:
    """An open stream of another service would hold the drain for its whole grace."""
    with ServerProcess(tmp_path, "--grace", "1h") as server:
        health = health_pb2_grpc.HealthStub(server.channel).Watch(health_pb2.HealthCheckRequest())
        assert next(health).status == health_pb2.HealthCheckResponse.SERVING
        workers = server.children()
        server.signal(signal.SIGINT)
        assert next(health).status == health_pb2.HealthCheckResponse.NOT_SERVING
        server.signal(signal.SIGINT)
        assert server.ended() == 1
        wait_until(lambda: not any(map(alive, workers)))
