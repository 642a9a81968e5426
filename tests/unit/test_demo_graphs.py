"""The demo's graphs: made by the script beside them, readable in every format, small enough to carry along."""

from __future__ import annotations

import runpy
import sys
from pathlib import Path

import pytest
from nearchord import Graph

DEMO = Path(__file__).resolve().parents[2] / "deploy" / "demo"
FOLDER = DEMO / "graphs"
FILES = sorted(path for path in FOLDER.iterdir() if path.suffix != ".txt")


def test_script_makes_the_same_graphs_again(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """What is committed is what the seed gives; compared as graphs, because compressors differ in bytes."""
    monkeypatch.setattr(sys, "argv", ["make_graphs.py", str(tmp_path)])
    runpy.run_path(str(DEMO / "make_graphs.py"), run_name="__main__")
    tables = sorted(path.name for path in tmp_path.glob("*.txt"))
    assert tables == ["night-channels.txt", "night-seasons.txt"]
    assert [(tmp_path / name).read_bytes() for name in tables] == [(FOLDER / name).read_bytes() for name in tables]
    assert sorted(path.name for path in tmp_path.iterdir() if path.name not in tables) == [path.name for path in FILES]
    assert all(Graph.read(tmp_path / path.name) == Graph.read(path) for path in FILES)


def test_readers_find_nothing_to_drop() -> None:
    """No self-loops, no repeated edges, nothing assumed."""
    assert [(path.name, Graph.read(path).notices) for path in FILES] == [(path.name, ()) for path in FILES]


def test_every_format_is_there_and_small() -> None:
    """Together below half a megabyte, so that a checkout stays light."""
    endings = {"".join(path.suffixes) for path in FILES}
    assert endings >= {".col", ".col.gz", ".csv", ".graphml", ".json", ".json.gz"}
    assert sum(path.stat().st_size for path in FILES) < 500_000
