"""The diagram of a job's life in the contributor guide."""

from __future__ import annotations

from pathlib import Path

from nearchord_service.model.diagram import diagram
from nearchord_service.model.stage import TRANSITIONS

GUIDE = Path(__file__).resolve().parents[2] / "DEVELOPERS.md"


def test_diagram_in_the_guide_is_that_of_the_table() -> None:
    """The guide shows what the code says; on failure paste `python -m nearchord_service.model.diagram` there."""
    assert f"```mermaid\n{diagram()}```" in GUIDE.read_text(encoding="utf-8")


def test_diagram_has_an_arrow_for_every_transition() -> None:
    """No row of the table is left out."""
    arrows = [line for line in diagram().splitlines() if " : " in line]
    assert len(arrows) == len(TRANSITIONS)
    assert all(f"{row.target} : {row.name}" in line for row, line in zip(TRANSITIONS, arrows, strict=True))
