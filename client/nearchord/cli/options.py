"""Options that several commands share, gathered into plain values."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import wraps
from typing import Any

import click

import nearchord
from nearchord.cli.asking import OPTIONS, QUESTION, VECTORS, Asked, VectorFiles, question_of
from nearchord.files import FORMATS

Command = Callable[..., int]

_UNITS = {"": 1, "B": 1, "KIB": 2**10, "MIB": 2**20, "GIB": 2**30}


@dataclass(frozen=True)
class Ask:
    """What is asked of each graph, and on which terms."""

    question: nearchord.Question
    vectors: VectorFiles
    budget: nearchord.Budget
    when_over: str
    priority: int
    not_after: dt.datetime | None
    label: str

    def about(self, graph: nearchord.Graph) -> Asked:
        """The question about one graph, with the numbers from its files."""
        return self.vectors.read(self.question, graph)

    def request(self, graph: nearchord.Graph, asked: Asked, label: str = "") -> nearchord.JobRequest:
        """The request for one graph of a batch; `label` serves when the caller gave none."""
        return nearchord.JobRequest(
            graph,
            asked.question,
            budget=self.budget,
            when_over=self.when_over,
            priority=self.priority,
            not_after=self.not_after,
            label=self.label or label,
        )

    def submit(self, service: nearchord.Service, graph: nearchord.Graph, asked: Asked) -> nearchord.Job:
        """Submit one graph as a job of its own."""
        return service.submit(
            graph,
            asked.question,
            budget=self.budget,
            when_over=self.when_over,
            priority=self.priority,
            not_after=self.not_after,
            label=self.label,
        )


@dataclass(frozen=True)
class Source:
    """How graph files are read: format (None: told by the name), decimals of their weights, and a weights file."""

    format: str | None
    scale: int | None
    weights: str | None


class Size(click.ParamType[int]):
    """Bytes, plain or with KiB, MiB or GiB."""

    name = "BYTES"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> int:
        """Read the number and its unit."""
        match = re.fullmatch(r"(\d+) *([A-Za-z]*)", str(value).strip())
        if match is None or match[2].upper() not in _UNITS:
            self.fail(f"{value!r} is not a size; write bytes, or a number with KiB, MiB or GiB, such as 512MiB")
        return int(match[1]) * _UNITS[match[2].upper()]


class Moment(click.ParamType[dt.datetime]):
    """A point in time: ISO 8601 (UTC unless it says otherwise), or +SECONDS from now."""

    name = "TIME"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> dt.datetime:
        """Read either form."""
        text = str(value).strip()
        try:
            if text.startswith("+"):
                return dt.datetime.now(dt.UTC) + dt.timedelta(seconds=float(text[1:]))
            moment = dt.datetime.fromisoformat(text)
        except (ValueError, OverflowError):
            self.fail(f"{value!r} is no time; write 2031-05-01T22:00Z, or +3600 for an hour from now")
        return moment if moment.tzinfo else moment.replace(tzinfo=dt.UTC)


server = click.option(
    "--server", envvar="NEARCHORD_SERVER", metavar="HOST:PORT", help="The service to use [NEARCHORD_SERVER]."
)
as_json = click.option("--json", "as_json", is_flag=True, help="Print JSON for programs.")
whole_batch = click.option("--batch", "is_batch", is_flag=True, help="The id names a batch.")

_BUDGET = [
    click.option("--fill", type=int, metavar="K", help="Fill edges allowed; 0: chordal only.  [default: any]"),
    click.option("--states", type=int, metavar="N", help="States of the dynamic program.  [default: 10000000]"),
    click.option("--seconds", type=float, metavar="S", help="Running time, queue wait not counted.  [default: 60]"),
    click.option("--memory", type=Size(), help="Memory of the solve, e.g. 512MiB.  [default: 1GiB]"),
    click.option(
        "--when-over",
        type=click.Choice([str(choice) for choice in nearchord.WhenOver]),
        default=str(nearchord.WhenOver.BOUND),
        show_default=True,
        help="When fill or states do not suffice: give the best bounds, or stop.",
    ),
]
_QUEUE = [
    click.option("--priority", type=int, default=0, help="-1000 to 1000; larger starts earlier.  [default: 0]"),
    click.option("--not-after", type=Moment(), help="Do not start later: ISO 8601, or +SECONDS."),
    click.option("--label", default="", help="Free text that `jobs` shows."),
]
_SOURCE = [
    click.option("--format", type=click.Choice(list(FORMATS)), help="Format.  [default: by the file's name]"),
    click.option("--scale", type=int, metavar="K", help="Multiply weights by K, for files with decimals."),
    click.option("--weights", metavar="FILE", help="Weights from another file: one a line, or CSV name,weight."),
]


def _with(options: Sequence[Callable[[Command], Command]], command: Command) -> Command:
    for option in reversed(options):
        command = option(command)
    return command


def asks(command: Command) -> Command:
    """Give a command the options of a question, its budget and its place in the queue, as one `ask`."""

    @wraps(command)
    def gathering(
        *,
        question: str,
        fill: int | None,
        states: int | None,
        seconds: float | None,
        memory: int | None,
        when_over: str,
        priority: int,
        not_after: dt.datetime | None,
        label: str,
        **rest: Any,
    ) -> int:
        given = {field: rest.get(field) for field in OPTIONS}
        for pins in ("must", "never"):
            given[pins] = sum(given[pins] or (), ())
        asked = question_of(question, given)
        vectors = VectorFiles(given["scenarios"], given["demands"], rest.get("scale"))
        budget = nearchord.Budget(fill=fill, states=states, seconds=seconds, memory=memory)
        ask = Ask(asked, vectors, budget, when_over, priority, not_after, label)
        return command(ask=ask, **{name: value for name, value in rest.items() if name not in _OF_THE_QUESTION})

    return _with([*QUESTION, *_BUDGET, *_QUEUE], gathering)


_OF_THE_QUESTION = OPTIONS.keys() - {"weights"}
"""Options that end in the question; the weights of a file end in the graph."""


def reads(command: Command) -> Command:
    """Give a command the options of reading graph files, as one `source`."""

    @wraps(command)
    def gathering(*, format: str | None, scale: int | None, weights: str | None, **rest: object) -> int:
        return command(source=Source(format, scale, weights), **rest)

    return _with(_SOURCE, gathering)


def brings_vectors(command: Command) -> Command:
    """Give a command the options of the numbers that an answer does not carry, as one `vectors`."""

    @wraps(command)
    def gathering(*, scenarios: str | None, demands: str | None, **rest: Any) -> int:
        return command(vectors=VectorFiles(scenarios, demands, rest.get("scale")), **rest)

    return _with(VECTORS, gathering)


def graph_argument(command: Command) -> Command:
    """Give a command the argument FILE."""
    return click.argument("file", metavar="FILE")(command)
