"""A service in memory that breaks where a test wants it to."""

# ruff: noqa: N802 (methods carry the names of the contract)
from __future__ import annotations

import hashlib
import threading
from collections import Counter, defaultdict
from concurrent import futures
from contextlib import contextmanager

import grpc
from google.protobuf.any_pb2 import Any as Packed
from google.protobuf.duration_pb2 import Duration
from google.rpc import code_pb2, error_details_pb2, status_pb2
from grpc_status import rpc_status
from nearchord.v1 import (
    answer_pb2,
    content_pb2,
    graph_service_pb2,
    graph_service_pb2_grpc,
    job_pb2,
    job_service_pb2,
    job_service_pb2_grpc,
    load_service_pb2,
    load_service_pb2_grpc,
    question_pb2,
)

CODES = {
    grpc.StatusCode.UNAVAILABLE: code_pb2.UNAVAILABLE,
    grpc.StatusCode.NOT_FOUND: code_pb2.NOT_FOUND,
    grpc.StatusCode.INVALID_ARGUMENT: code_pb2.INVALID_ARGUMENT,
    grpc.StatusCode.ALREADY_EXISTS: code_pb2.ALREADY_EXISTS,
    grpc.StatusCode.FAILED_PRECONDITION: code_pb2.FAILED_PRECONDITION,
    grpc.StatusCode.ABORTED: code_pb2.ABORTED,
}


def rich_status(code, reason, message, *details):
    """A failure as the contract writes it."""
    packed = []
    for detail in (error_details_pb2.ErrorInfo(reason=reason, domain="nearchord"), *details):
        anything = Packed()
        anything.Pack(detail)
        packed.append(anything)
    return rpc_status.to_status(status_pb2.Status(code=CODES[code], message=message, details=packed))


def draining():
    """The server is shutting down and says when to come back."""
    retry = error_details_pb2.RetryInfo(retry_delay=Duration(nanos=1_000_000))
    return rich_status(grpc.StatusCode.UNAVAILABLE, "DRAINING", "the server is shutting down", retry)


class FakeService(
    graph_service_pb2_grpc.GraphServiceServicer,
    job_service_pb2_grpc.JobServiceServicer,
    load_service_pb2_grpc.LoadServiceServicer,
):
    """`breaks[method]` lists after how many messages each next stream of a method breaks (None: not at all)."""

    def __init__(self):
        self.calls = Counter()
        self.metadata = {}
        self.breaks = defaultdict(list)
        self.partial = {}
        self.contents = {}
        self.refused = set()
        self.jobs = {}
        self.batches = {}
        self.events = []
        self.parts = []
        self.seen = defaultdict(list)
        self.gate = threading.Event()
        self.gate.set()
        self.held = threading.Event()
        self.left = threading.Event()
        self.inline_bytes = 1 << 20

    def _enter(self, context, method):
        self.calls[method] += 1
        self.metadata = dict(context.invocation_metadata())
        return self.breaks[method].pop(0) if self.breaks[method] else None

    def _break(self, context):
        context.abort_with_status(draining())

    def GetServer(self, request, context):
        self._enter(context, "GetServer")
        return load_service_pb2.GetServerResponse(
            version="1", questions=["independent-set"], inline_bytes=self.inline_bytes, piece_bytes=1000
        )

    def WatchLoad(self, request, context):
        limit = self._enter(context, "WatchLoad")
        for number in range(1000):
            if number == limit:
                self._break(context)
            yield load_service_pb2.WatchLoadResponse(waiting=number)

    def GetUpload(self, request, context):
        self._enter(context, "GetUpload")
        stored = request.address in self.contents
        return graph_service_pb2.GetUploadResponse(
            committed_bytes=len(self.partial.get(request.address, b"")), stored=stored
        )

    def StoreContent(self, requests, context):
        limit = self._enter(context, "StoreContent")
        opening = next(requests).opening
        if opening.address in self.refused:
            assert self.held.wait(20)
            context.abort_with_status(rich_status(grpc.StatusCode.INVALID_ARGUMENT, "CONTENT_INVALID", "refused"))
        if not self.gate.is_set():
            context.add_callback(self.left.set)
            self.held.set()
            self._hold(context)
        self.seen["offset"].append(opening.offset)
        data = self.partial.setdefault(opening.address, bytearray())
        assert opening.offset == len(data)
        for number, request in enumerate(requests):
            if number == limit:
                self._break(context)
            data += request.piece
        assert len(data) == opening.size_bytes
        assert hashlib.sha256(data).hexdigest() == opening.address
        self.contents[opening.address] = bytes(data)
        return graph_service_pb2.StoreContentResponse(content=content_pb2.Content(address=opening.address))

    def ReadContent(self, request, context):
        limit = self._enter(context, "ReadContent")
        data = self.contents[request.address][request.offset :]
        for number, begin in enumerate(range(0, len(data), 3)):
            if number == limit:
                self._break(context)
            yield graph_service_pb2.ReadContentResponse(piece=data[begin : begin + 3])

    def DeleteContent(self, request, context):
        self._enter(context, "DeleteContent")
        del self.contents[request.address]
        return graph_service_pb2.DeleteContentResponse()

    def _input_known(self, spec, context):
        addresses = (spec.input.graph_address, spec.input.weights_address, spec.input.names_address)
        for address in filter(None, addresses):
            if address not in self.contents:
                context.abort_with_status(
                    rich_status(grpc.StatusCode.NOT_FOUND, "CONTENT_UNKNOWN", f"no content {address}")
                )

    def SubmitJob(self, request, context):
        self._enter(context, "SubmitJob")
        self.seen["spec"].append(request.spec)
        self._input_known(request.spec, context)
        job = self.jobs.setdefault(request.request_id, job_pb2.Job(id=f"job{len(self.jobs)}", stage=1))
        job.question.CopyFrom(request.spec.question)
        return job_service_pb2.SubmitJobResponse(job=job)

    def SubmitBatch(self, requests, context):
        limit = self._enter(context, "SubmitBatch")
        opening = next(requests).opening
        specs = []
        for number, request in enumerate(requests):
            if number == limit:
                self._break(context)
            self._input_known(request.spec, context)
            specs.append(request.spec)
        self.seen["batch"].append((opening.request_id, specs))
        batch = self.batches.setdefault(opening.request_id, job_pb2.Batch(id=f"b{len(self.batches)}", jobs=len(specs)))
        return job_service_pb2.SubmitBatchResponse(batch=batch)

    def GetJob(self, request, context):
        self._enter(context, "GetJob")
        if request.job_id == "none":
            info = error_details_pb2.ResourceInfo(resource_name="none", description="no such job")
            context.abort_with_status(
                rich_status(grpc.StatusCode.NOT_FOUND, "JOB_UNKNOWN", "no job 'none' is stored", info)
            )
        done = self.events and self.events[-1].transition.stage == job_pb2.STAGE_DONE
        question = question_pb2.Question(independent_set=question_pb2.IndependentSet())
        return job_service_pb2.GetJobResponse(
            job=job_pb2.Job(id=request.job_id, stage=3 if done else 2, question=question)
        )

    def GetBatch(self, request, context):
        self._enter(context, "GetBatch")
        return job_service_pb2.GetBatchResponse(batch=job_pb2.Batch(id=request.batch_id, jobs=3, done=3))

    def ListJobs(self, request, context):
        self._enter(context, "ListJobs")
        self.seen["list"].append(request)
        begin = int(request.page_token or 0)
        question = question_pb2.Question(vertex_cover=question_pb2.VertexCover())
        jobs = [job_pb2.Job(id=f"job{i}", stage=1, question=question) for i in range(begin, min(begin + 2, 5))]
        token = str(begin + 2) if begin + 2 < 5 else ""
        return job_service_pb2.ListJobsResponse(jobs=jobs, next_page_token=token)

    def _watch(self, context, method, after, response):
        limit = self._enter(context, method)
        self.seen["after"].append(after)
        context.add_callback(self.left.set)
        for number, event in enumerate(e for e in self.events if e.sequence > after):
            if number == limit:
                self._break(context)
            yield response(event=event)
        self._hold(context)

    def _hold(self, context):
        """Waits until the test opens the gate or the caller leaves."""
        while not self.gate.wait(0.01) and context.is_active():
            pass

    def WatchJob(self, request, context):
        yield from self._watch(context, "WatchJob", request.after_sequence, job_service_pb2.WatchJobResponse)

    def WatchBatch(self, request, context):
        yield from self._watch(context, "WatchBatch", request.after_sequence, job_service_pb2.WatchBatchResponse)

    def CancelJob(self, request, context):
        self._enter(context, "CancelJob")
        question = question_pb2.Question(independent_set=question_pb2.IndependentSet())
        return job_service_pb2.CancelJobResponse(
            job=job_pb2.Job(id=request.job_id, stage=3, verdict=5, question=question, cancel_requested=True)
        )

    def CancelBatch(self, request, context):
        self._enter(context, "CancelBatch")
        return job_service_pb2.CancelBatchResponse(batch=job_pb2.Batch(id=request.batch_id, jobs=3, done=3))

    def ReadAnswer(self, request, context):
        limit = self._enter(context, "ReadAnswer")
        for number, part in enumerate(self.parts):
            if number == limit:
                self._break(context)
            yield job_service_pb2.ReadAnswerResponse(part=part)

    def ReadBatchAnswers(self, request, context):
        limit = self._enter(context, "ReadBatchAnswers")
        after = request.after_index if request.HasField("after_index") else -1
        self.seen["after_index"].append(after)
        index, sent = -1, 0
        for part in self.parts:
            index = part.head.batch_index if part.WhichOneof("part") == "head" else index
            if index > after:
                if sent == limit:
                    self._break(context)
                sent += 1
                yield job_service_pb2.ReadBatchAnswersResponse(part=part)

    def DeleteJob(self, request, context):
        self._enter(context, "DeleteJob")
        if request.job_id == "running":
            context.abort_with_status(
                rich_status(grpc.StatusCode.FAILED_PRECONDITION, "JOB_NOT_DONE", "job running has not ended")
            )
        return job_service_pb2.DeleteJobResponse()

    def DeleteBatch(self, request, context):
        self._enter(context, "DeleteBatch")
        return job_service_pb2.DeleteBatchResponse()


def transition(sequence, stage, verdict=0, reason="", index=0):
    """An event that says which stage a job has reached."""
    return job_pb2.Event(
        sequence=sequence,
        job_id="j",
        batch_index=index,
        transition=job_pb2.Transition(stage=stage, verdict=verdict, reason=reason),
    )


def progress(sequence, phase=job_pb2.PHASE_SWEEP, **figures):
    """An event that says how far a solve is."""
    return job_pb2.Event(sequence=sequence, job_id="j", progress=job_pb2.Progress(phase=phase, **figures))


def answer_parts(index, chosen, piece=2, **head):
    """An answer as a stream of parts: `chosen` in pieces of `piece` elements."""
    data = b"".join(int(v).to_bytes(4, "little") for v in chosen)
    column = answer_pb2.ColumnInfo(name="chosen", type=answer_pb2.ELEMENT_TYPE_UINT32, length=len(chosen))
    fields = {
        "job_id": f"j{index}",
        "question": question_pb2.Question(independent_set=question_pb2.IndependentSet()),
        "verdict": job_pb2.VERDICT_PROVEN,
        "value": answer_pb2.Rational(numerator=len(chosen), denominator=1),
        "bound": answer_pb2.Rational(numerator=len(chosen), denominator=1),
        "reason": "value and bound meet",
        "vertices": 10,
    }
    yield answer_pb2.AnswerPart(head=answer_pb2.AnswerHead(batch_index=index, columns=[column], **{**fields, **head}))
    for begin in range(0, len(chosen), piece):
        chunk = answer_pb2.ColumnChunk(name="chosen", offset=begin, data=data[begin * 4 : (begin + piece) * 4])
        yield answer_pb2.AnswerPart(column=chunk)


def column_parts(columns, piece=3, **head):
    """An answer whose columns are the given arrays, in pieces of `piece` elements."""
    types = {"uint32": answer_pb2.ELEMENT_TYPE_UINT32, "int64": answer_pb2.ELEMENT_TYPE_INT64}
    infos = [
        answer_pb2.ColumnInfo(name=name, type=types[str(values.dtype)], length=values.size)
        for name, values in columns.items()
    ]
    yield answer_pb2.AnswerPart(head=answer_pb2.AnswerHead(columns=infos, **head))
    for name, values in columns.items():
        for begin in range(0, values.size, piece):
            data = values[begin : begin + piece].tobytes()
            yield answer_pb2.AnswerPart(column=answer_pb2.ColumnChunk(name=name, offset=begin, data=data))


@contextmanager
def served(service):
    """Serves on a free loopback port; gives its address."""
    server = grpc.server(futures.ThreadPoolExecutor(8), options=[("grpc.so_reuseport", 0)])
    graph_service_pb2_grpc.add_GraphServiceServicer_to_server(service, server)
    job_service_pb2_grpc.add_JobServiceServicer_to_server(service, server)
    load_service_pb2_grpc.add_LoadServiceServicer_to_server(service, server)
    port = server.add_insecure_port("127.0.0.1:0")
    server.start()
    try:
        yield f"127.0.0.1:{port}"
    finally:
        service.gate.set()
        server.stop(None).wait(10)
