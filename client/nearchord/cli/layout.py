"""Text on stdout: JSON objects, tables that fit the terminal, and lists that do not flood it."""

from __future__ import annotations

import json
import shutil
import sys
import textwrap
from collections.abc import Sequence
from typing import Any

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

LISTING_LINES = 4


def print_json(value: dict[str, Any]) -> None:
    """Print one object on one line, at once."""
    sys.stdout.write(json.dumps(value, ensure_ascii=False) + "\n")
    sys.stdout.flush()


def print_table(headings: Sequence[str], rows: Sequence[Sequence[str]], numbers: frozenset[str] = frozenset()) -> None:
    """Print rows under headings, `numbers` aligned right: fitted to a terminal, in full width anywhere else."""
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, padding=(0, 1), show_edge=False)
    for heading in headings:
        if heading in numbers:
            table.add_column(heading, justify="right", no_wrap=True)
        else:
            table.add_column(heading, overflow="ellipsis", no_wrap=True)
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    on_terminal = sys.stdout.isatty()
    console = Console(file=sys.stdout, highlight=False, width=None if on_terminal else _full_width(headings, rows))
    console.print(table)


def _full_width(headings: Sequence[str], rows: Sequence[Sequence[str]]) -> int:
    return sum(max(len(cell) for cell in column) + 3 for column in zip(headings, *rows, strict=True))


def listing(words: Sequence[str]) -> str:
    """Words on one line anywhere but on a terminal, which gets a few wrapped lines and the number left out."""
    text = " ".join(words)
    if not sys.stdout.isatty():
        return text
    width = max(20, shutil.get_terminal_size().columns - 10)
    wrapped = textwrap.wrap(text, width, break_long_words=False, break_on_hyphens=False)
    if len(wrapped) > LISTING_LINES:
        shown = sum(len(line.split(" ")) for line in wrapped[:LISTING_LINES])
        wrapped = [*wrapped[:LISTING_LINES], f"... and {len(words) - shown:,} more (--json has all)"]
    return ("\n" + " " * 9).join(wrapped)
