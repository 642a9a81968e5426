"""What a scenario found: printed as tables, written as JSON."""

import json
from collections.abc import Iterable
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any, Literal

from rich.console import Console
from rich.table import Table

from bench import machine

Row = dict[str, Any]


@dataclass(frozen=True)
class Target:
    """A promised number beside the measured one.  The benchmark reports it; nothing fails on it."""

    name: str
    sense: Literal["<=", ">="]
    promised: float
    measured: float
    unit: str = "s"

    @property
    def holds(self) -> bool:
        """Whether the measurement keeps the promise."""
        return self.measured <= self.promised if self.sense == "<=" else self.measured >= self.promised


@dataclass
class Report:
    """The findings of one scenario; rows of a table share their keys."""

    scenario: str
    parameters: Row
    tables: dict[str, list[Row]] = field(default_factory=dict)
    phases: list[Row] = field(default_factory=list)
    targets: list[Target] = field(default_factory=list)
    facts: Row = field(default_factory=machine.facts)

    def show(self, console: Console, *, profile: bool) -> None:
        """Print the tables; the seconds per phase only when asked for."""
        for title, rows in self.tables.items():
            console.print(_table(f"{self.scenario}: {title}", rows))
        if profile and self.phases:
            console.print(_table(f"{self.scenario}: seconds by phase", self.phases))
        if self.targets:
            console.print(_table(f"{self.scenario}: promised and measured", map(_target_row, self.targets)))

    def write(self, folder: Path) -> Path:
        """Write ``folder/SCENARIO.json`` (replaced if there) and return its path."""
        folder.mkdir(parents=True, exist_ok=True)
        path = folder / f"{self.scenario}.json"
        content = asdict(self)
        content["targets"] = [{**asdict(target), "holds": target.holds} for target in self.targets]
        path.write_text(json.dumps(content, indent=1, default=_plain) + "\n", encoding="utf-8")
        return path


def _target_row(target: Target) -> Row:
    return {
        "number": target.name,
        "promised": f"{target.sense} {target.promised:g} {target.unit}",
        "measured": f"{target.measured:.4g} {target.unit}",
        "holds": "yes" if target.holds else "NO",
    }


def _table(title: str, rows: Iterable[Row]) -> Table:
    listed = list(rows)
    names = list(dict.fromkeys(name for row in listed for name in row))
    table = Table(title=title, title_justify="left")
    for name in names:
        table.add_column(name, justify="left" if any(isinstance(row.get(name), str) for row in listed) else "right")
    for row in listed:
        table.add_row(*(_cell(row.get(name)) for name in names))
    return table


def _cell(value: Any) -> str:
    if value is None:
        return "-"
    if isinstance(value, float):
        return f"{value:.4g}" if abs(value) < 1000 else f"{value:,.0f}"
    return f"{value:,}" if isinstance(value, int) and not isinstance(value, bool) else str(value)


def _plain(value: Any) -> Any:
    return value.item() if hasattr(value, "item") else str(value)
