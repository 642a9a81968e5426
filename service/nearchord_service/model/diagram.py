"""The life of a job as a Mermaid state diagram, written from the transition table.

`python -m nearchord_service.model.diagram` prints it; the contributor guide holds a copy that a test compares.
"""

from __future__ import annotations

import sys

from nearchord_service.model.stage import TRANSITIONS, Stage, Transition, Verdict


def diagram() -> str:
    """Return the diagram's text, one line for each row of the table, in the table's order."""
    arrows = [f"    {_node(row.source)} --> {row.target} : {_caption(row)}" for row in TRANSITIONS]
    return "\n".join(["stateDiagram-v2", *arrows, f"    {Stage.DONE} --> [*]"]) + "\n"


def _node(stage: Stage | None) -> str:
    return "[*]" if stage is None else str(stage)


def _caption(row: Transition) -> str:
    verdicts = [str(verdict) for verdict in Verdict if verdict in row.verdicts]
    caption = f"{row.name}, by the attempt's holder" if row.fenced else row.name
    return f"{caption} ({', '.join(verdicts)})" if verdicts else caption


if __name__ == "__main__":
    sys.stdout.write(diagram())
