"""`jobs`, `answer`, `watch` and `cancel`: coming back to work on a server."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

import nearchord
from unit.cli.conftest import FakeService, make_answer

JOB = "1" * 32


def test_jobs_prints_one_object_a_line(service: FakeService, nearchord_command: Any) -> None:
    """With the promised keys."""
    service.answers = [make_answer(label="one"), make_answer(label="two")]
    ran = nearchord_command("jobs", "--json")
    found = [json.loads(line) for line in ran.out.splitlines()]
    assert ran.code == 0
    assert [line["label"] for line in found] == ["one", "two"]
    assert {key: found[0][key] for key in ("job", "question", "stage", "verdict")} == {
        "job": JOB,
        "question": "independent-set",
        "stage": "DONE",
        "verdict": "PROVEN",
    }


def test_jobs_table_is_not_cut_where_no_terminal_is(service: FakeService, nearchord_command: Any) -> None:
    """A pipe gets whole ids and labels, however long."""
    label = "a label of more than eighty characters " * 3
    service.answers = [make_answer(label=label.strip())]
    ran = nearchord_command("jobs")
    assert JOB in ran.out
    assert label.strip() in ran.out


def test_answer_uses_the_names_the_job_carried(service: FakeService, nearchord_command: Any) -> None:
    """The file is not needed again."""
    service.answers = [make_answer(names_address="c" * 64)]
    ran = nearchord_command("answer", JOB, "--json")
    assert ran.code == 0
    assert json.loads(ran.out)["chosen"] == ["a", "c"]


def test_answer_without_names_counts_from_zero(service: FakeService, nearchord_command: Any) -> None:
    """A job submitted without names has only vertex numbers."""
    ran = nearchord_command("answer", JOB, "--json")
    assert json.loads(ran.out)["chosen"] == [0, 2]


def test_answer_need_not_wait(service: FakeService, nearchord_command: Any) -> None:
    """--no-wait fails on a job that has not ended, and says what to do."""
    service.ended = False
    for arguments in (["answer", JOB, "--no-wait"], ["answer", "--batch", JOB, "--no-wait"]):
        ran = nearchord_command(*arguments)
        assert ran.code == 1
        assert "--no-wait" in ran.err


def test_answers_of_a_batch_are_one_object_a_line(service: FakeService, nearchord_command: Any) -> None:
    """`answer --batch` brings back what `batch` would have written."""
    service.answers = [make_answer(), make_answer(verdict=nearchord.Verdict.BROKEN, value=None, bound=None)]
    ran = nearchord_command("answer", "--batch", "b" * 32, "--json")
    assert [json.loads(line)["value"] for line in ran.out.splitlines()] == [7, None]
    assert ran.code == 1


def test_watch_prints_each_stage_and_exits_by_the_verdict(service: FakeService, nearchord_command: Any) -> None:
    """One line a stage; the last one has verdict and reason."""
    service.answers = [make_answer(verdict=nearchord.Verdict.INFEASIBLE)]
    ran = nearchord_command("watch", JOB)
    lines = ran.out.splitlines()
    assert [line.split()[2].rstrip(":") for line in lines] == ["WAITING", "SOLVING", "DONE"]
    assert "INFEASIBLE: as told" in lines[-1]
    assert ran.code == 1


def test_watch_resumes_after_a_number(service: FakeService, nearchord_command: Any) -> None:
    """--after leaves out what was seen already."""
    ran = nearchord_command("watch", JOB, "--after", "2", "--json")
    assert [json.loads(line)["sequence"] for line in ran.out.splitlines()] == [3]


def test_cancel_asks_for_a_job_or_a_batch(service: FakeService, nearchord_command: Any) -> None:
    """Both say where things stand."""
    service.answers = [replace(make_answer(), verdict=nearchord.Verdict.CANCELLED, reason="withdrawn")]
    job = nearchord_command("cancel", JOB)
    batch = nearchord_command("cancel", "--batch", "b" * 32)
    assert service.cancelled == [JOB, "b" * 32]
    assert (job.code, batch.code) == (0, 0)
    assert "CANCELLED (withdrawn)" in job.out
    assert "1 of 1 jobs" in batch.out
