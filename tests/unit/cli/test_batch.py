"""`batch`: which files it takes, what it writes, and what it exits with."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import nearchord
import pytest
from unit.cli.conftest import FakeService, make_answer

ASK = ("--question", "independent-set")


@pytest.fixture
def folder(service: FakeService, square: Path, tmp_path: Path) -> Path:
    """A folder with two graphs and something else, and the two answers."""
    place = tmp_path / "graphs"
    place.mkdir()
    (place / "b.csv").write_text("source,target\nu,v\nv,w\nw,x\n", encoding="utf-8")
    (place / "a.col").write_bytes(square.read_bytes())
    (place / "notes.txt").write_text("not a graph", encoding="utf-8")
    service.answers = [make_answer(), make_answer(job_id="2" * 32, value=2, bound=2)]
    return place


def test_folder_becomes_one_line_a_graph_in_order(service: FakeService, nearchord_command: Any, folder: Path) -> None:
    """The keys of `solve --json` and `file`, names as in each file."""
    ran = nearchord_command("batch", str(folder), *ASK)
    lines = [json.loads(line) for line in ran.out.splitlines()]
    assert ran.code == 0, ran.err
    assert [line["file"] for line in lines] == [str(folder / "a.col"), str(folder / "b.csv")]
    assert [line["chosen"] for line in lines] == [[1, 3], ["u", "w"]]
    assert [request.label for request in service.batches[0]] == ["a.col", "b.csv"]


def test_out_takes_the_lines_and_leaves_stdout_empty(
    service: FakeService, nearchord_command: Any, folder: Path, tmp_path: Path
) -> None:
    """With --out the lines go to the file."""
    out = tmp_path / "answers.jsonl"
    ran = nearchord_command("batch", str(folder), *ASK, "--out", str(out))
    assert (ran.code, ran.out) == (0, "")
    assert len(out.read_text(encoding="utf-8").splitlines()) == 2


def test_files_named_twice_are_solved_once(service: FakeService, nearchord_command: Any, folder: Path) -> None:
    """A file may be reached as itself, by its folder and by a pattern."""
    ran = nearchord_command("batch", str(folder / "b.csv"), str(folder), f"{folder}/*.col", *ASK)
    files = [Path(json.loads(line)["file"]).name for line in ran.out.splitlines()]
    assert files == ["b.csv", "a.col"]
    assert len(service.batches[0]) == 2


def test_bad_files_are_all_named_and_nothing_is_submitted(
    service: FakeService, nearchord_command: Any, folder: Path
) -> None:
    """One mend, one more try: the error lists every file that cannot be taken."""
    (folder / "c.col").write_text("p edge 2 1\ne 1 3\n", encoding="utf-8")
    (folder / "d.json").write_text("{", encoding="utf-8")
    ran = nearchord_command("batch", str(folder), *ASK)
    assert ran.code == 2
    assert ran.out == ""
    assert "2 of 4 files" in ran.err
    assert "c.col, line 2" in ran.err
    assert "d.json" in ran.err
    assert service.batches == []


@pytest.mark.parametrize(
    ("verdicts", "code"),
    [(("PROVEN", "BOUNDED"), 0), (("PROVEN", "BROKEN"), 1), (("CANCELLED", "PROVEN"), 3), (("CANCELLED", "BROKEN"), 1)],
)
def test_exit_code_speaks_for_every_line(
    service: FakeService, nearchord_command: Any, folder: Path, verdicts: tuple[str, str], code: int
) -> None:
    """0 only when every line is PROVEN or BOUNDED."""
    service.answers = [replace(a, verdict=nearchord.Verdict(v)) for a, v in zip(service.answers, verdicts, strict=True)]
    assert nearchord_command("batch", str(folder), *ASK).code == code


def test_interrupt_names_the_batch(service: FakeService, nearchord_command: Any, folder: Path) -> None:
    """Ctrl-C on a server leaves the batch running."""
    service.interrupt = True
    ran = nearchord_command("batch", str(folder), *ASK, "--server", "host:1")
    assert ran.code == 3
    assert f"nearchord answer --batch {'b' * 32} --server host:1" in ran.err


def test_folder_without_graphs_is_refused(service: FakeService, nearchord_command: Any, tmp_path: Path) -> None:
    """Nothing to do is an error, with the endings that graph files have."""
    empty = tmp_path / "empty"
    empty.mkdir()
    ran = nearchord_command("batch", str(empty), *ASK)
    assert ran.code == 2
    assert ".graphml" in ran.err
