"""`solve` and `submit`: what they send, print, and exit with."""

from __future__ import annotations

import io
import json
import sys
from pathlib import Path
from typing import Any

import nearchord
import pytest
from nearchord.cli.app import run
from unit.cli.conftest import FakeService, make_answer

ASK = ("--question", "independent-set")


def test_json_is_one_object_with_the_promised_keys(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Programs rely on these keys, and on DIMACS numbers from 1."""
    ran = nearchord_command("solve", str(square), *ASK, "--json")
    found = json.loads(ran.out)
    assert ran.code == 0
    assert ran.err == ""
    assert ran.out.count("\n") == 1
    promised = {"job", "question", "verdict", "value", "bound", "chosen", "fill", "seconds", "reason", "proof"}
    assert promised | {"proof_kinds", "fill_lower_bound", "states", "label"} <= set(found)
    assert (found["question"], found["verdict"], found["value"], found["bound"]) == ("independent-set", "PROVEN", 7, 7)
    assert found["chosen"] == [1, 3]
    assert (found["proof"], found["proof_kinds"]) == ("search", ["search"])


def test_people_get_the_same_without_json(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Verdict, value, names and job stand on stdout, nothing on stderr when that is no terminal."""
    ran = nearchord_command("solve", str(square), *ASK)
    lines = dict(line.split(maxsplit=1) for line in ran.out.splitlines())
    assert lines["verdict"] == "PROVEN: value and bound meet"
    assert lines["value"] == "7 (nothing better exists)"
    assert lines["names"] == "1 3"
    assert lines["job"] == "1" * 32
    assert ran.err == ""


@pytest.mark.parametrize(
    ("verdict", "code"),
    [
        ("PROVEN", 0),
        ("BOUNDED", 0),
        ("OVER_FILL", 1),
        ("INFEASIBLE", 1),
        ("EXPIRED", 1),
        ("BROKEN", 1),
        ("CANCELLED", 3),
    ],
)
def test_exit_code_follows_the_verdict(
    service: FakeService, nearchord_command: Any, square: Path, verdict: str, code: int
) -> None:
    """0 answered, 1 another verdict, 3 cancelled."""
    service.answers = [make_answer(verdict=nearchord.Verdict(verdict))]
    assert nearchord_command("solve", str(square), *ASK).code == code


def test_options_reach_the_service(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Question, pins, budget and place in the queue are handed on as given."""
    options = "--must 1,3 --must 2 --never 4 --fill 5 --states 99 --seconds 2.5 --memory 512MiB --when-over stop"
    queue = "--priority 7 --not-after 2031-05-01T22:00 --label evening"
    ran = nearchord_command("solve", str(square), "--question", "vertex-cover", *options.split(), *queue.split())
    assert ran.code == 0, ran.err
    graph, question, terms = service.submitted[0]
    assert (graph.n, graph.m) == (4, 4)
    assert question == nearchord.VertexCover(must=("1", "3", "2"), never=("4",))
    assert terms["budget"] == nearchord.Budget(fill=5, states=99, seconds=2.5, memory=2**29)
    assert (terms["when_over"], terms["priority"], terms["label"]) == ("stop", 7, "evening")
    assert terms["not_after"].isoformat() == "2031-05-01T22:00:00+00:00"


def test_stdin_is_read_for_a_dash(
    service: FakeService, nearchord_command: Any, square: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """`-` stands for stdin."""
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(square.read_bytes())))
    ran = nearchord_command("solve", "-", "--format", "dimacs", *ASK, "--json")
    assert ran.code == 0, ran.err
    assert service.submitted[0][0].n == 4


def test_notices_of_the_reader_go_to_stderr(service: FakeService, nearchord_command: Any, tmp_path: Path) -> None:
    """Self-loops and repeated edges in a file are dropped with a counted notice."""
    file = tmp_path / "loops.col"
    file.write_text("p edge 3 4\ne 1 1\ne 1 2\ne 2 1\ne 2 3\n", encoding="utf-8")
    ran = nearchord_command("solve", str(file), *ASK, "--json")
    assert ran.code == 0, ran.err
    assert ran.err.startswith("note: ")
    assert service.submitted[0][0].m == 2


def test_submit_prints_the_id_alone(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """So that scripts can keep it."""
    ran = nearchord_command("submit", str(square), *ASK, "--server", "host:1")
    assert (ran.code, ran.out, ran.err) == (0, "1" * 32 + "\n", "")
    assert service.connected == [("host:1", None)]


def test_interrupt_on_a_server_says_how_to_resume(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """Ctrl-C detaches: the job goes on, and the message has the commands to come back."""
    service.interrupt = True
    ran = nearchord_command("solve", str(square), *ASK, "--server", "host:1")
    assert ran.code == 3
    assert f"nearchord answer {'1' * 32} --server host:1" in ran.err
    assert service.cancelled == []


def test_interrupt_of_a_private_service_says_so(service: FakeService, nearchord_command: Any, square: Path) -> None:
    """There is nothing to resume: the service was this command's own."""
    service.interrupt = True
    ran = nearchord_command("solve", str(square), *ASK)
    assert ran.code == 3
    assert "private service ended" in ran.err
    assert "resume" not in ran.err


@pytest.mark.parametrize("encoding", ["utf-8", "ascii"])
def test_names_reach_any_encoding(
    service: FakeService, nearchord_command: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, encoding: str
) -> None:
    """JSON escapes letters that stdout cannot write, and people get something readable."""
    file = tmp_path / "names.csv"
    file.write_text("source,target\nGrün,b\nb,Ödön\nÖdön,d\n", encoding="utf-8")
    out = io.TextIOWrapper(io.BytesIO(), encoding=encoding)
    monkeypatch.setattr(sys, "stdout", out)
    assert run(["solve", str(file), *ASK, "--json"]) == 0
    assert run(["solve", str(file), *ASK]) == 0
    first, *rest = out.buffer.getvalue().decode(encoding).splitlines()
    assert json.loads(first)["chosen"] == ["Grün", "Ödön"]
    assert rest[-1].startswith("names    Gr")
