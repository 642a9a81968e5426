"""A stand-in for nearchord_solve whose solves do what their state budget tells: behave, misbehave, or break.

Workers import it by name. It has the names of the solver that the runner uses, and no kernels, so it is warm at once.
"""

from __future__ import annotations

import os
import signal
import time
from dataclasses import dataclass
from enum import Enum, IntEnum
from types import SimpleNamespace

import numpy as np

VERSION = "scripted"


class Script(IntEnum):
    """What a solve does; given as `Budget.states` of the job."""

    ANSWER = 1
    UNTIL_STOPPED = 2
    DEAF = 3
    FAIL = 4
    EXIT = 5
    STOP_SELF = 6
    ALLOCATE = 7
    NONSENSE = 8
    NO_REASON = 9
    HOLD = 10
    LEAK = 11
    KILL_SELF = 12
    SHORT_WORK = 13


class Phase(IntEnum):
    READ = 0
    ORDER = 1
    FILL = 2
    TREE = 3
    SWEEP = 4
    IMPROVE = 5
    DONE = 6


class Monitor:
    STOP, PHASE, STEP, STEPS, FILL, FILL_LOWER, BAGS_DONE, BAGS, STATES = range(9)
    HAS_INCUMBENT, INCUMBENT, HAS_BOUND, BOUND = range(9, 13)

    def __init__(self, cells, on_phase=None):
        assert cells.shape == (16,)
        self.cells = cells
        self.on_phase = on_phase

    def enter(self, phase, steps=0):
        self.cells[self.PHASE] = phase
        self.cells[self.STEPS] = steps
        self.on_phase(phase)


class Graph(SimpleNamespace):
    @classmethod
    def from_canonical(cls, n, row_ptr, targets):
        return cls(n=n, row_ptr=row_ptr, targets=targets)


class Budget(SimpleNamespace):
    pass


@dataclass(frozen=True)
class IndependentSet:
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()
    prices: bool = False
    conflict_prices: bool = False
    best: int = 0
    count: bool = False
    limit: int | None = None
    scenarios: int = 0


@dataclass(frozen=True)
class VertexCover:
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()


@dataclass(frozen=True)
class Clique:
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()


@dataclass(frozen=True)
class ColourableSubgraph:
    colours: int = 2
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()
    prices: bool = False
    scenarios: int = 0


@dataclass(frozen=True)
class InducedForest:
    must: tuple[int, ...] = ()
    never: tuple[int, ...] = ()
    prices: bool = False
    scenarios: int = 0


@dataclass(frozen=True)
class Colouring:
    pass


@dataclass(frozen=True)
class FractionalColouring:
    pass


@dataclass(frozen=True)
class Fill:
    pass


@dataclass(frozen=True)
class Structure:
    pass


QUESTIONS = {
    "independent-set": IndependentSet,
    "vertex-cover": VertexCover,
    "clique": Clique,
    "colourable-subgraph": ColourableSubgraph,
    "induced-forest": InducedForest,
    "colouring": Colouring,
    "fractional-colouring": FractionalColouring,
    "fill": Fill,
    "structure": Structure,
}
Verdict = Enum("Verdict", {name: name for name in ("PROVEN", "BOUNDED", "OVER_FILL", "INFEASIBLE", "CANCELLED")})
_LEAKED = []


def warm_up(report):
    report(1, 1)


def predicted_bytes(n, m):
    return 100 * n + 10 * m


def outcome(verdict=Verdict.PROVEN, value=7, chosen=(0,), reason="scripted"):
    return SimpleNamespace(
        verdict=verdict,
        value=value,
        bound=value,
        chosen=np.array(chosen, np.int64),
        fill=0,
        fill_lower_bound=0,
        states=3,
        bags=2,
        largest_bag=2,
        parts=1,
        fill_cores=0,
        proof="certificate",
        proof_kinds=("certificate",),
        reason=reason,
        columns={},
        recognition=None,
        report=None,
        count=None,
    )


def fill_outcome():
    """The fill of a cycle on four vertices, in the types that a solver of arrays has."""
    columns = {
        "fill_edge": np.array([0, 2], np.uint32),
        "elimination_order": np.array([1, 3, 0, 2], np.uint32),
        "chordless_cycle": np.array([0, 1, 2, 3], np.uint32),
        "packing_ring": np.array([0, 4], np.int64),
        "packing_group": np.arange(5),
        "packing_vertex": np.array([0, 1, 2, 3], np.uint32),
        "packing_numerator": np.array([1], np.int64),
        "packing_denominator": np.array([1], np.int64),
        "core_start": np.array([0, 4], np.int64),
        "core_vertex": np.array([0, 1, 2, 3], np.uint32),
    }
    recognition = SimpleNamespace(chordal=np.False_, interval=np.False_, split=None, splittance=np.int64(2))
    return with_fields(
        outcome(value=1), chosen=None, columns=columns, recognition=recognition, proof_kinds=("packing",)
    )


def structure_outcome():
    """The structure of a cycle on four vertices."""
    predictions = [
        SimpleNamespace(question=name, colours=q, states=9 + q, at_least=q == 3, memory_bytes=64, fits=q < 3)
        for name, q in (("independent-set", 0), ("colourable-subgraph", 3))
    ]
    report = SimpleNamespace(components=np.int64(1), largest_core=4, predictions=predictions)
    return with_fields(outcome(value=1), chosen=None, report=report)


def with_fields(namespace, **changes):
    return SimpleNamespace(**{**vars(namespace), **changes})


def solve(question, graph, weights, budget, when_over, monitor):
    monitor.enter(Phase.SWEEP, 4)
    monitor.cells[monitor.STEP] = 1
    if budget.states == Script.ANSWER and type(question) in _OUTCOMES:
        return _OUTCOMES[type(question)]()
    return _SCRIPTS[Script(budget.states)](graph, weights, monitor)


def _answer(graph, weights, monitor):
    heaviest = int(np.argmax(weights)) if weights is not None else 0
    value = int(weights[heaviest]) if weights is not None else 1
    return outcome(value=value, chosen=(heaviest,))


def _short_work(graph, weights, monitor):
    for _ in range(5):
        np.sort(np.arange(50_000)[::-1])
    return outcome()


def _until_stopped(graph, weights, monitor):
    monitor.cells[monitor.INCUMBENT], monitor.cells[monitor.HAS_INCUMBENT] = 4, 1
    monitor.cells[monitor.BOUND], monitor.cells[monitor.HAS_BOUND] = 9, 1
    while not monitor.cells[monitor.STOP]:
        time.sleep(0.001)
    cancelled = monitor.cells[monitor.STOP] == 2
    return outcome(Verdict.CANCELLED if cancelled else Verdict.BOUNDED, reason="told to stop")


def _deaf(graph, weights, monitor):
    monitor.cells[monitor.INCUMBENT], monitor.cells[monitor.HAS_INCUMBENT] = 4, 1
    monitor.cells[monitor.BOUND], monitor.cells[monitor.HAS_BOUND] = 9, 1
    while True:
        np.sort(np.arange(100_000)[::-1])


def _fail(graph, weights, monitor):
    raise ZeroDivisionError("scripted defect")


def _exit(graph, weights, monitor):
    os._exit(3)


def _stop_self(graph, weights, monitor):
    os.kill(os.getpid(), signal.SIGSTOP)
    return outcome()


def _kill_self(graph, weights, monitor):
    os.kill(os.getpid(), signal.SIGKILL)


def _allocate(graph, weights, monitor):
    held = []
    while True:
        held.append(np.ones(1 << 20, np.int64))


def _hold(graph, weights, monitor):
    """Use 64 MiB and give them back."""
    return outcome(value=int(np.ones(8 << 20, np.int64).sum()))


def _leak(graph, weights, monitor):
    """Use 64 MiB and keep them."""
    _LEAKED.append(np.ones(8 << 20, np.int64))
    return outcome(value=os.getpid())


_OUTCOMES = {Fill: fill_outcome, Structure: structure_outcome}
_SCRIPTS = {
    Script.ANSWER: _answer,
    Script.UNTIL_STOPPED: _until_stopped,
    Script.DEAF: _deaf,
    Script.FAIL: _fail,
    Script.EXIT: _exit,
    Script.STOP_SELF: _stop_self,
    Script.KILL_SELF: _kill_self,
    Script.ALLOCATE: _allocate,
    Script.NONSENSE: lambda graph, weights, monitor: outcome(chosen=range(10 * graph.n + 10)),
    Script.NO_REASON: lambda graph, weights, monitor: outcome(reason=""),
    Script.HOLD: _hold,
    Script.LEAK: _leak,
    Script.SHORT_WORK: _short_work,
}
