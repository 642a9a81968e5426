"""The options that say what is asked, and the question that they make."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace
from typing import Any

import click

import nearchord
from nearchord import files
from nearchord.cli.exits import usage

OPTIONS = {
    "colours": "-q",
    "must": "--must",
    "never": "--never",
    "prices": "--prices",
    "conflict_prices": "--conflict-prices",
    "best": "--best",
    "count": "--count",
    "limit": "--limit",
    "scenarios": "--scenarios",
    "demands": "--demands",
    "weights": "--weights",
}
"""Options by the field of a question that they fill; weights belong to the graph."""


class NameList(click.ParamType[tuple[str, ...]]):
    """Vertex names separated by commas."""

    name = "V,.."

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> tuple[str, ...]:
        """Split, trim, and drop empty entries."""
        return tuple(part for part in (piece.strip() for piece in str(value).split(",")) if part)


VECTORS = [
    click.option("--scenarios", metavar="FILE", help="Weights of scenarios: CSV, names first, then a column each."),
    click.option("--demands", metavar="FILE", help="How much each vertex needs, in a file like that of --weights."),
]
QUESTION: list[Callable[..., Any]] = [
    click.option("--question", required=True, type=click.Choice(list(nearchord.QUESTIONS)), help="What to ask."),
    click.option("-q", "colours", type=int, metavar="N", help="Colours, for colourable-subgraph.  [default: 2]"),
    click.option("--must", type=NameList(), multiple=True, help="Vertices that have to be in the answer."),
    click.option("--never", type=NameList(), multiple=True, help="Vertices that must not be in the answer."),
    click.option("--prices", is_flag=True, help="Say what each vertex costs to take in, or to leave out."),
    click.option("--conflict-prices", is_flag=True, help="Say what dropping each conflict would gain."),
    click.option("--best", type=int, metavar="K", help="Give the K best sets, at most 1000."),
    click.option("--count", is_flag=True, help="Count the sets that are as heavy as the best."),
    click.option("--limit", type=int, metavar="C", help="Choose at most C vertices."),
    *VECTORS,
]


@dataclass(frozen=True)
class VectorFiles:
    """Files with the numbers that a question has of its own, and the factor for decimals in them."""

    scenarios: str | None
    demands: str | None
    scale: int | None

    def read(self, question: nearchord.Question, graph: nearchord.Graph) -> Asked:
        """The question about this graph, with its numbers."""
        if self.demands is not None:
            return Asked(_with(question, demands=files.read_demands(self.demands, graph, self.scale)))
        if self.scenarios is not None:
            titles, rows = files.read_scenarios(self.scenarios, graph, self.scale)
            return Asked(_with(question, scenarios=rows), titles)
        return Asked(question)


def _with(question: nearchord.Question, **numbers: Any) -> nearchord.Question:
    return replace(question, **numbers)


@dataclass(frozen=True)
class Asked:
    """A question about one graph, and the titles of its scenarios."""

    question: nearchord.Question
    titles: tuple[str, ...] = ()


def question_of(name: str, given: dict[str, Any]) -> nearchord.Question:
    """The question with its options, still without the numbers that files hold; those that do not fit are refused.

    `given` has the options by field, as they came from the command line: None, False or () where they did not.
    """
    kind = nearchord.QUESTIONS[name]
    for field, value in given.items():
        if (value or value == 0) and value is not False and not takes(kind, field):
            raise usage(f"{OPTIONS[field]} does not go with the question {name}", _instead(kind, field))
    if given.get("scenarios") and given.get("weights"):
        raise usage("--scenarios and --weights both give weights", "leave one of them out")
    plain = {"colours", "must", "never", "prices", "conflict_prices", "best", "count", "limit"}
    values = {field: value for field, value in given.items() if field in plain and takes(kind, field)}
    return kind(**{field: value for field, value in values.items() if value is not None})


def takes(kind: type[nearchord.Question], field: str) -> bool:
    """Whether a question has a field, or for `weights` looks at those of the graph."""
    return kind.takes_weights if field == "weights" else field in {one.name for one in fields(kind)}


def _instead(kind: type[nearchord.Question], field: str) -> str:
    if field == "weights" and takes(kind, "demands"):
        return "give what each vertex needs: --demands FILE"
    *names, last = [name for name, other in nearchord.QUESTIONS.items() if takes(other, field)]
    return f"leave it out, or ask {', '.join(names)}{' or ' if names else ''}{last}"
