"""`check` and `demo`: what is confirmed, and what is not."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import nearchord
import numpy as np
import pytest
from unit.cli.conftest import FakeService, make_answer

OBJECT = {
    "job": "1" * 32,
    "question": "independent-set",
    "verdict": "PROVEN",
    "value": 7,
    "bound": 7,
    "chosen": [1, 3],
    "fill": 1,
    "seconds": 0.25,
    "reason": "value and bound meet",
    "proof": "search",
}


def written(folder: Path, **changes: object) -> str:
    """A file with the answer about the square, changed."""
    file = folder / "answer.json"
    file.write_text(json.dumps({**OBJECT, **changes}), encoding="utf-8")
    return str(file)


def test_choice_and_value_are_confirmed_the_bound_is_not(nearchord_command: Any, square: Path, tmp_path: Path) -> None:
    """Without a proof the code is 1, and stdout says why."""
    ran = nearchord_command("check", str(square), written(tmp_path))
    lines = ran.out.splitlines()
    assert ran.code == 1
    assert ran.err == ""
    assert [line.split(":")[0] for line in lines] == ["confirmed"] * (len(lines) - 1) + ["not confirmed"]
    assert len(lines) >= 3


def test_a_certificate_that_was_left_behind_is_asked_for(nearchord_command: Any, square: Path, tmp_path: Path) -> None:
    """The object says `certificate`, but the proof stands in a file of its own."""
    ran = nearchord_command("check", str(square), written(tmp_path, proof="certificate"))
    assert ran.code == 1
    assert "`solve --proof FILE` writes it, `check --proof FILE` reads it" in ran.out.splitlines()[-1]


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"chosen": [1, 2], "value": 4, "bound": 4}, ["error: "]),
        ({"value": 8, "bound": 8}, ["8"]),
        ({"chosen": [1, 3], "must": [2]}, ["2"]),
    ],
    ids=["conflict inside", "wrong value", "pin not kept"],
)
def test_wrong_answers_are_not_confirmed(
    nearchord_command: Any, square: Path, tmp_path: Path, changes: dict[str, object], words: list[str]
) -> None:
    """One message, code 1, nothing confirmed on stdout."""
    ran = nearchord_command("check", str(square), written(tmp_path, **changes))
    assert (ran.code, ran.out) == (1, "")
    assert all(word in ran.err for word in words), ran.err


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"question": "clairvoyance"}, ["question", "clairvoyance", "vertex-cover"]),
        ({"verdict": None}, ["verdict", "PROVEN"]),
        ({"value": "7/0"}, ["value", "7/0"]),
        ({"value": 7.5}, ["value", "7.5"]),
        ({"chosen": 3}, ["chosen", "list"]),
        ({"chosen": [1, 9]}, ["chosen", "9"]),
        ({"proof": "vision"}, ["proof", "vision", "certificate"]),
        ({"proof": ["search"]}, ["proof", "search", "certificate"]),
    ],
)
def test_objects_that_do_not_fit_are_bad_input(
    nearchord_command: Any, square: Path, tmp_path: Path, changes: dict[str, object], words: list[str]
) -> None:
    """The message names file and key."""
    ran = nearchord_command("check", str(square), written(tmp_path, **changes))
    assert (ran.code, ran.out) == (2, "")
    assert "answer.json" in ran.err
    assert all(word in ran.err for word in words), ran.err


@pytest.mark.parametrize("text", ["", "[]", "{", "\u00ff"], ids=["empty", "list", "broken", "letters"])
def test_answers_that_are_no_object_are_bad_input(
    nearchord_command: Any, square: Path, tmp_path: Path, text: str
) -> None:
    """Anything but one JSON object."""
    file = tmp_path / "answer.json"
    file.write_text(text, encoding="utf-8")
    ran = nearchord_command("check", str(square), str(file))
    assert (ran.code, ran.out) == (2, "")
    assert "answer.json" in ran.err


def about(graph: nearchord.Graph, **changes: Any) -> nearchord.Answer:
    """An answer that says it is about this graph and its weights."""
    assert graph.weights is not None
    origin = replace(
        make_answer().provenance,
        graph_address=graph.address,
        weights_address=hashlib.sha256(graph.weights.astype("<i8").tobytes()).hexdigest(),
    )
    return make_answer(label="square.col", provenance=origin, **changes)


def test_answer_about_another_graph_is_not_confirmed(nearchord_command: Any, square: Path, tmp_path: Path) -> None:
    """The addresses in its provenance are compared with the file's."""
    ran = nearchord_command("check", str(square), written(tmp_path, provenance={"graph_address": "f" * 64}))
    assert (ran.code, ran.out) == (1, "")
    assert "f" * 64 in ran.err


@pytest.fixture
def folder(square: Path, tmp_path: Path) -> Path:
    """A demo of one graph."""
    place = tmp_path / "graphs"
    place.mkdir()
    (place / "square.col").write_bytes(square.read_bytes())
    return place


@pytest.mark.parametrize(
    ("changes", "code", "words"),
    [
        ({}, 0, ["yes", "1 of 1 answers confirmed"]),
        ({"verdict": nearchord.Verdict.BOUNDED, "bound": 8}, 0, ["yes", "nothing is worth more than 8"]),
        ({"chosen": np.array([0, 1], dtype=np.uint32), "value": 4}, 1, ["failed", "0 of 1 answers confirmed"]),
        ({"verdict": nearchord.Verdict.BROKEN, "value": None}, 1, ["failed", "BROKEN, value and bound meet"]),
    ],
    ids=["proven", "bounded", "conflict inside", "broken"],
)
def test_demo_ends_well_only_when_all_is_confirmed(
    service: FakeService, nearchord_command: Any, folder: Path, changes: dict[str, Any], code: int, words: list[str]
) -> None:
    """Every answer is checked from its graph."""
    service.answers = [about(nearchord.Graph.read(folder / "square.col"), **changes)]
    ran = nearchord_command("demo", "--graphs", str(folder))
    assert ran.code == code, ran.err
    assert all(word in ran.out for word in words), ran.out
