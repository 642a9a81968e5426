"""What the documentation shows is what the commands print: every `console` block is run and compared.

A block holds commands after `$ ` and, below each, its output; lines that differ from run to run (job ids, seconds) are
compared without their figures. `NEARCHORD_RECORD=1` writes the output found into the pages instead; read the difference
before committing it.
"""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest
from end_to_end.server_process import DEADLINE, ROOT, ServerProcess, environment

PAGES = sorted((ROOT / "client" / "docs").glob("*.md"))
GRAPHS = ROOT / "deploy" / "demo" / "graphs"
RECORD = os.environ.get("NEARCHORD_RECORD") == "1"

_BLOCK = re.compile(r"^```console\n(.*?)^```$", re.MULTILINE | re.DOTALL)
_CHANGING = ((re.compile(r"^(seconds +)\S+", re.MULTILINE), r"\1…"), (re.compile(r"^(job +)\S+", re.MULTILINE), r"\1…"))


@dataclass(frozen=True)
class Step:
    """A command and what the page says it prints."""

    command: str
    output: str


def steps_of(block: str) -> list[Step]:
    """The commands of a block."""
    parts = re.split(r"^\$ ", block, flags=re.MULTILINE)
    assert parts[0] == "", "a console block begins with a command"
    return [Step(*(part.split("\n", 1))) for part in parts[1:]]


def comparable(text: str) -> str:
    """Output without what differs from run to run."""
    for pattern, kept in _CHANGING:
        text = pattern.sub(kept, text)
    return "\n".join(line.rstrip() for line in text.rstrip().splitlines())


@pytest.fixture(scope="module")
def bench(tmp_path_factory: pytest.TempPathFactory) -> Iterator[tuple[Path, dict[str, str]]]:
    """A folder with the demo graphs, and the environment of a shell with `nearchord` and a running server."""
    folder = tmp_path_factory.mktemp("documented")
    graphs = folder / "graphs"
    shutil.copytree(GRAPHS, graphs)
    tools = folder / "bin"
    tools.mkdir()
    script = tools / "nearchord"
    script.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m nearchord.cli "$@"\n', encoding="utf-8")
    script.chmod(0o755)
    with ServerProcess(folder / "data") as server:
        path = os.pathsep.join((str(tools), os.environ["PATH"]))
        yield graphs, {**environment(), "PATH": path, "NEARCHORD_SERVER": server.address, "COLUMNS": "100"}


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_the_pages_show_what_the_commands_print(page: Path, bench: tuple[Path, dict[str, str]]) -> None:
    """Run in order, in one folder, as a reader would who follows the page."""
    folder, settings = bench
    text = page.read_text(encoding="utf-8")
    found: list[str] = []

    def run(match: re.Match[str]) -> str:
        shown = []
        for step in steps_of(match[1]):
            done = subprocess.run(
                ["bash", "-c", step.command], cwd=folder, env=settings, capture_output=True, text=True,
                timeout=DEADLINE, check=False,
            )  # fmt: skip
            printed = done.stdout + done.stderr
            shown.append(f"$ {step.command}\n{printed.rstrip()}\n" if printed.strip() else f"$ {step.command}\n")
            if not RECORD and comparable(printed) != comparable(step.output):
                found.append(f"$ {step.command}\nshows\n{step.output}\nprints\n{printed}")
        return f"```console\n{''.join(shown)}```"

    recorded = _BLOCK.sub(run, text)
    if RECORD:
        page.write_text(recorded, encoding="utf-8")
    assert not found, "\n".join(found)


def test_every_question_has_an_example() -> None:
    """A question that the command line takes stands in some block of the pages."""
    import nearchord

    shown = "".join(match[1] for page in PAGES for match in _BLOCK.finditer(page.read_text(encoding="utf-8")))
    missing = [name for name in nearchord.QUESTIONS if f"--question {name}" not in shown]
    assert not missing
