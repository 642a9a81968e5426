"""The leasing side of a store, kept in memory: just enough to watch a dispatcher work, with faults on demand."""

from __future__ import annotations

import datetime as dt
import threading
from collections import deque
from concurrent.futures import Future
from dataclasses import replace

from nearchord_service.model.content import Bytes
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.job import Job, Lease
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.model.stage import Stage
from nearchord_service.store.port import Change, Renewal

START = dt.datetime(2030, 1, 1, tzinfo=dt.UTC)
WAIT = 10.0


def job(name):
    return Job(
        id=name,
        owner="team",
        batch_id=None,
        batch_index=0,
        label="",
        graph_address="0" * 64,
        weights_address=None,
        names_address=None,
        vertices=1,
        edges=0,
        question=Question(QuestionName.INDEPENDENT_SET),
        budget=Budget(),
        when_over=WhenOver.BOUND,
        priority=0,
        not_after=None,
        stage=Stage.WAITING,
        verdict=None,
        reason="",
        attempt=0,
        cancel_requested=False,
        created_at=START,
        started_at=None,
        finished_at=None,
        sequence=0,
    )


class MemoryStore:
    """Jobs wait in `queue`, are leased, end in `finished`. `unavailable` counts calls that fail before one works."""

    def __init__(self):
        self.changed = threading.Condition()
        self.queue = deque()
        self.held = {}
        self.finished = {}
        self.offered = []
        self.returned = []
        self.progress = []
        self.renewals = []
        self.claims = []
        self.reclaimed = []
        self.cancels = set()
        self.unavailable = {}
        self.broken_finish = False
        self.listeners = []
        self.in_claim = None

    # For tests

    def add(self, *names):
        with self.changed:
            self.queue.extend(job(name) for name in names)
        self.tell(Change(work=True))

    def tell(self, change):
        for listener in list(self.listeners):
            listener(change)

    def cancel(self, name):
        self.cancels.add(name)
        self.tell(Change(cancels=frozenset({name})))

    def steal(self, name):
        with self.changed:
            self.held.pop(name)

    def wait(self, condition):
        with self.changed:
            assert self.changed.wait_for(condition, WAIT), f"never came true: {self.__dict__}"

    # LeaseStore

    def subscribe(self, listener):
        self.listeners.append(listener)
        return lambda: self.listeners.remove(listener)

    def claim(self, holder, limit, seconds):
        self._may_fail("claim")
        with self.changed:
            self.claims.append(limit)
            leases = []
            while self.queue and len(leases) < limit:
                one = self.queue.popleft()
                one = replace(one, stage=Stage.SOLVING, attempt=one.attempt + 1)
                self.held[one.id] = one
                lost = sum(1 for name, _, worker_lost in self.returned if name == one.id and worker_lost)
                leases.append(Lease(one, one.attempt, lost, START, Bytes(b"", None), None))
            self.changed.notify_all()
        if self.in_claim is not None:
            self.in_claim(leases)
        return tuple(leases)

    def renew(self, holder, leases, seconds):
        self._may_fail("renew")
        with self.changed:
            self.renewals.append(list(leases))
            self.changed.notify_all()
            return {
                (name, attempt): Renewal(self._holds(name, attempt), name in self.cancels) for name, attempt in leases
            }

    def record_progress(self, rows):
        self._may_fail("record_progress")
        with self.changed:
            self.progress.extend(rows)
            self.changed.notify_all()

    def finish(self, name, attempt, answer):
        self._may_fail("finish")
        self.offered.append(name)
        if self.broken_finish:
            raise RuntimeError("cannot be written")
        return self._settle(name, attempt, lambda: self.finished.__setitem__(name, answer))

    def give_back(self, name, attempt, reason, *, worker_lost):
        self._may_fail("give_back")

        def back():
            self.returned.append((name, reason, worker_lost))
            lost = sum(1 for other, _, was_lost in self.returned if other == name and was_lost)
            if name not in self.cancels and lost < 3:
                self.queue.append(self.last)

        return self._settle(name, attempt, back)

    def reclaim(self, holder):
        self._may_fail("reclaim")
        self.reclaimed.append(holder)
        return 0

    def _holds(self, name, attempt):
        return name in self.held and self.held[name].attempt == attempt

    def _settle(self, name, attempt, effect):
        done = Future()
        with self.changed:
            held = self._holds(name, attempt)
            if held:
                self.last = self.held.pop(name)
                effect()
            self.changed.notify_all()
        done.set_result(held)
        return done

    def _may_fail(self, call):
        with self.changed:
            left = self.unavailable.get(call, 0)
            if left:
                self.unavailable[call] = left - 1
                self.changed.notify_all()
                raise StoreUnavailable(f"{call} is out of order for now")
