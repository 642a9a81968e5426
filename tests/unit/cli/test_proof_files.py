"""`solve --proof` and `check --proof`: what is written is what is read, and only for its own graph."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import nearchord
import pytest
from certified import answered
from fill_answers import fill_answer
from nearchord.cli import proof_file

ORDERED = (
    nearchord.Clique(must=(0,)),
    nearchord.ColourableSubgraph(colours=2, never=(0,)),
    nearchord.InducedForest(must=(2,), never=(0,)),
)
HOUSE = nearchord.Graph.from_edges(
    6, [(0, 1), (1, 2), (2, 3), (0, 3), (3, 4), (3, 5), (4, 5)], weights=[3, 4, 5, 6, 7, 8]
)
SQUARE = nearchord.Graph.from_edges(4, [(0, 1), (1, 2), (2, 3), (0, 3)], weights=[3, 1, 4, 1])


def proven() -> nearchord.Answer:
    """An answer with the format of its proof told."""
    answer = answered(SQUARE)
    return replace(answer, provenance=replace(answer.provenance, proof_format=1))


def test_a_proof_that_was_written_confirms_the_bound(tmp_path: Path) -> None:
    """And without it the bound stays open."""
    answer, file = proven(), str(tmp_path / "p")
    assert proof_file.write(file, answer)
    bare = replace(answer, columns={})
    assert nearchord.check(SQUARE, bare).not_confirmed
    whole = replace(bare, columns=proof_file.read(file, SQUARE))
    assert not nearchord.check(SQUARE, whole).not_confirmed


@pytest.mark.parametrize("question", ORDERED, ids=str)
def test_an_order_that_was_written_confirms_the_bound(tmp_path: Path, question: nearchord.Question) -> None:
    """Pins included: they decide which vertices it has to have."""
    answer, file = answered(HOUSE, question), str(tmp_path / "p")
    answer = replace(answer, provenance=replace(answer.provenance, proof_format=1))
    assert proof_file.write(file, answer)
    bare = replace(answer, columns={name: column for name, column in answer.columns.items() if name == "colour"})
    assert nearchord.check(HOUSE, bare).not_confirmed
    whole = replace(bare, columns={**bare.columns, **proof_file.read(file, HOUSE)})
    assert not nearchord.check(HOUSE, whole).not_confirmed
    assert whole.proof_bytes == answer.proof_bytes > 0


def test_the_size_of_a_proof_is_told_for_each_vertex() -> None:
    """Eight columns for a square."""
    answer = proven()
    taken = sum(column.nbytes for column in answer.columns.values())
    assert proof_file.size_of(answer) == f"{taken} B ({taken / 4:.1f} bytes a vertex)"


def test_no_file_is_written_without_a_proof(tmp_path: Path) -> None:
    """So that none is mistaken for one."""
    assert not proof_file.write(str(tmp_path / "p"), replace(proven(), columns={}))
    assert not (tmp_path / "p").exists()


def test_why_there_is_no_file_does_not_contradict_the_answer() -> None:
    """A fill may say `certificate` and have no columns of a proof: its witnesses are in the object itself."""
    searched = replace(proven(), columns={}, proof=nearchord.ProofKind.SEARCH)
    assert proof_file.why_none(searched) == "the answer carries none (search)"
    assert "--json" in proof_file.why_none(fill_answer(SQUARE))


@pytest.mark.parametrize(
    ("change", "word"),
    [
        ({"graph_address": "f" * 64}, "not about this one"),
        ({"proof_format": 2}, "format"),
        ({"columns": {"proof_bag_above": {"type": "object", "data": []}}}, "type"),
        ({"columns": {"proof_bag_above": {"type": "int64", "data": [2**70]}}}, "proof"),
        ({"columns": {"proof_bag_above": {"type": "int64", "data": [1.5]}}}, "whole"),
        ({"columns": []}, "proof"),
    ],
)
def test_other_files_are_refused(tmp_path: Path, change: dict[str, object], word: str) -> None:
    """The message names the file and what is wrong."""
    file = tmp_path / "p"
    proof_file.write(str(file), proven())
    file.write_text(json.dumps({**json.loads(file.read_text()), **change}))
    with pytest.raises(nearchord.FileProblem, match=word):
        proof_file.read(str(file), SQUARE)
