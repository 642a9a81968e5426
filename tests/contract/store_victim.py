"""A process that works on a store until it is killed, and says on stdout what the store has confirmed to it."""

from __future__ import annotations

import os
import sys
import threading
from pathlib import Path

from contract.stores import HOMES, LIMITS, answer, graph, put, spec, submission
from nearchord_service.store.port import Store


def confirm(*words: object) -> None:
    os.write(1, (" ".join(map(str, words)) + "\n").encode())


def submit_for_ever(store: Store, name: str) -> None:
    number = 0
    while True:
        number += 1
        request = submission(
            *(spec(graph(number * 10 + i, padding=i << 19)) for i in range(4)),
            batch=True,
            request_id=f"{name}-{number}",
            fingerprint=b"same",
        )
        accepted = store.submit(request, LIMITS)
        assert accepted.batch is not None
        confirm("accepted", request.request_id, accepted.batch.id)


def upload_for_ever(store: Store, name: str) -> None:
    number = 0
    while True:
        number += 1
        data = name.encode() + number.to_bytes(8, "big") + bytes(3 << 19)
        confirm("stored", put(store, data))


def work_for_ever(store: Store, name: str) -> None:
    while True:
        for lease in store.claim(name, 2, 45):
            if store.finish(lease.job.id, lease.attempt, answer()).result():
                confirm("finished", lease.job.id)


def main(kind: str, place: str, life: str) -> None:
    store = HOMES[kind](Path(place)).open()
    store.reclaim("worker")
    bodies = (submit_for_ever, submit_for_ever, upload_for_ever, work_for_ever, work_for_ever)
    threads = []
    for index, body in enumerate(bodies):
        name = "worker" if body is work_for_ever else f"{life}-{index}"
        threads.append(threading.Thread(target=body, args=(store, name)))
        threads[-1].start()
    for thread in threads:  # as a server waits: an interpreter whose main thread has ended begins no new threads
        thread.join()


if __name__ == "__main__":
    main(*sys.argv[1:])
