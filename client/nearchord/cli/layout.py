"""Text on stdout: JSON objects, tables that fit the terminal, and lists that do not flood it."""

from __future__ import annotations

import json
import shutil
import sys
import textwrap
from collections.abc import Sequence
from typing import Any, TextIO

from rich.console import Console
from rich.table import Table
from rich.text import Text

CAPTION = 9
"""Columns that captions take."""

LISTING_LINES = 4
TERMINAL_ROWS = 20
"""Rows of a table that a terminal gets."""


def print_json(value: dict[str, Any]) -> None:
    """Print one object on one line, at once."""
    write_json(value, sys.stdout)


def write_json(value: dict[str, Any], file: TextIO) -> None:
    """Write one object on one line, at once; letters are escaped where the file's encoding may not have them."""
    escaped = not (file.encoding or "").lower().startswith("utf")
    file.write(json.dumps(value, ensure_ascii=escaped) + "\n")
    file.flush()


def print_text(text: str) -> None:
    """Print a paragraph, wrapped on a terminal under its own indentation."""
    if sys.stdout.isatty():
        indent = " " * (len(text) - len(text.lstrip()))
        text = textwrap.fill(
            text, shutil.get_terminal_size().columns, subsequent_indent=indent, replace_whitespace=False
        )
    sys.stdout.write(text + "\n")


def print_table(
    headings: Sequence[str], rows: Sequence[Sequence[str]], *, flexible: str, numbers: frozenset[str] = frozenset()
) -> None:
    """Print rows under headings, `numbers` aligned right. Where a terminal is too narrow only `flexible` is cut."""
    widths = [max(map(len, column)) for column in zip(headings, *rows, strict=True)]
    room = shutil.get_terminal_size().columns if sys.stdout.isatty() else None
    gap = 2 if room is None or sum(widths) + 2 * len(widths) <= room else 1
    if room is not None:
        cut = list(headings).index(flexible)
        widths[cut] = max(8, min(widths[cut], room - gap * (len(widths) - 1) - sum(widths) + widths[cut]))
    table = Table(box=None, pad_edge=False, padding=(0, gap, 0, 0), header_style="bold")
    for heading, width in zip(headings, widths, strict=True):
        table.add_column(
            heading,
            justify="right" if heading in numbers else "left",
            no_wrap=True,
            overflow="ellipsis",
            width=width,
        )
    for row in rows:
        table.add_row(*(Text(cell) for cell in row))
    console = Console(file=sys.stdout, highlight=False, width=room or sum(widths) + gap * len(widths))
    with console.capture() as capture:
        console.print(table)
    sys.stdout.writelines(f"{line.rstrip()}\n" for line in capture.get().splitlines())


def rows_shown(count: int) -> int:
    """How many of so many rows are printed: all, but on a terminal no more than fill it."""
    return min(count, TERMINAL_ROWS) if sys.stdout.isatty() else count


def print_first(
    headings: Sequence[str],
    rows: Sequence[Sequence[str]],
    total: int,
    *,
    flexible: str,
    numbers: frozenset[str] = frozenset(),
) -> None:
    """Print a table below a blank line, and how many of its `total` rows are left out."""
    sys.stdout.write("\n")
    print_table(headings, rows, flexible=flexible, numbers=numbers)
    if len(rows) < total:
        sys.stdout.write(f"... and {total - len(rows):,} more (--json has all)\n")


def print_entry(caption: str, text: str) -> None:
    """Print a caption with its text, wrapped beside the caption on a terminal."""
    _print_beside(caption, CAPTION, _beside_caption(text, CAPTION))


def print_listing(caption: str, words: Sequence[str], width: int = CAPTION) -> None:
    """Print words like an entry whose caption takes `width` columns; a terminal gets a few lines of them and the number
    left out."""
    lines = _beside_caption(" ".join(words), width)
    if len(lines) > LISTING_LINES:
        shown = sum(len(line.split(" ")) for line in lines[:LISTING_LINES])
        lines = [*lines[:LISTING_LINES], f"... and {len(words) - shown:,} more (--json has all)"]
    _print_beside(caption, width, lines)


def _print_beside(caption: str, width: int, lines: Sequence[str]) -> None:
    sys.stdout.write(f"{caption:<{width}}" + ("\n" + " " * width).join(lines) + "\n")


def _beside_caption(text: str, width: int) -> list[str]:
    if not sys.stdout.isatty():
        return [text]
    room = max(20, shutil.get_terminal_size().columns - width)
    return textwrap.wrap(text, room, break_long_words=False, break_on_hyphens=False) or [""]
