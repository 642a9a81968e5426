"""Client of the nearchord service: exact answers to optimisation questions about nearly chordal conflict graphs.

import nearchord

graph = nearchord.Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (3, 0)], weights=[3, 1, 4, 1])
with nearchord.connect("127.0.0.1:7411") as service:
    answer = service.submit(graph, nearchord.IndependentSet()).answer()
nearchord.check(graph, answer)
"""

from nearchord.answer import Answer, Prediction, Provenance, Recognition, Scenario, StructureReport
from nearchord.budget import Budget
from nearchord.check import check
from nearchord.checks.confirmed import Confirmed
from nearchord.child import embedded, embedded_async
from nearchord.errors import (
    AccessDenied,
    AlreadyExists,
    BadInput,
    CallFailed,
    CheckFailed,
    EmbeddedFailed,
    FileProblem,
    NearchordError,
    NotFound,
    NotReady,
    QuotaExceeded,
    Rejected,
    ServerFault,
    TimeoutExceeded,
    Unreachable,
    Violation,
)
from nearchord.graph import Graph
from nearchord.jobs import Addresses, BatchInfo, Event, JobInfo, JobRequest, Progress
from nearchord.load import Load, QuestionLoad, ServerInfo, Slots
from nearchord.question import (
    QUESTIONS,
    Clique,
    ColourableSubgraph,
    Colouring,
    Fill,
    FractionalColouring,
    IndependentSet,
    InducedForest,
    Question,
    Structure,
    VertexCover,
)
from nearchord.session.aio import AsyncBatch, AsyncJob, AsyncService, connect_async
from nearchord.session.sync import Batch, Job, Service, connect
from nearchord.stages import Phase, ProofKind, Stage, Verdict, WhenOver

__all__ = [
    "QUESTIONS",
    "AccessDenied",
    "Addresses",
    "AlreadyExists",
    "Answer",
    "AsyncBatch",
    "AsyncJob",
    "AsyncService",
    "BadInput",
    "Batch",
    "BatchInfo",
    "Budget",
    "CallFailed",
    "CheckFailed",
    "Clique",
    "ColourableSubgraph",
    "Colouring",
    "Confirmed",
    "EmbeddedFailed",
    "Event",
    "FileProblem",
    "Fill",
    "FractionalColouring",
    "Graph",
    "IndependentSet",
    "InducedForest",
    "Job",
    "JobInfo",
    "JobRequest",
    "Load",
    "NearchordError",
    "NotFound",
    "NotReady",
    "Phase",
    "Prediction",
    "Progress",
    "ProofKind",
    "Provenance",
    "Question",
    "QuestionLoad",
    "QuotaExceeded",
    "Recognition",
    "Rejected",
    "Scenario",
    "ServerFault",
    "ServerInfo",
    "Service",
    "Slots",
    "Stage",
    "Structure",
    "StructureReport",
    "TimeoutExceeded",
    "Unreachable",
    "Verdict",
    "VertexCover",
    "Violation",
    "WhenOver",
    "check",
    "connect",
    "connect_async",
    "embedded",
    "embedded_async",
]
