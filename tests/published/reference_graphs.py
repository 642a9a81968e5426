"""The real graphs with reference values, read from the folder of shared data."""

import csv
import os
from pathlib import Path

import numpy as np

SHARED = Path(os.environ.get("NEARCHORD_SHARED_DATA", Path(__file__).resolve().parents[2] / ".." / "shared" / "data"))


def reference_rows() -> list[dict[str, str]]:
    """Rows of VALUES.csv; its values come from CP-SAT, HiGHS and clique enumeration."""
    path = SHARED / "VALUES.csv"
    if not path.exists():
        return []
    with path.open() as file:
        return list(csv.DictReader(file))


def read_dimacs(name: str) -> tuple[int, list[tuple[int, int]], dict[int, int]]:
    """n, edges (loops and repetitions dropped) and vertex weights of a reference graph."""
    n, edges, weights = 0, set(), {}
    for line in (SHARED / "graphs" / f"{name}.col").read_text().splitlines():
        fields = line.split()
        if fields[:1] == ["p"]:
            n = int(fields[2])
        elif fields[:1] == ["n"]:
            weights[int(fields[1]) - 1] = int(fields[2])
        elif fields[:1] == ["e"]:
            u, v = sorted((int(fields[1]) - 1, int(fields[2]) - 1))
            if u != v:
                edges.add((u, v))
    return n, sorted(edges), weights


def weightings(n: int, own: dict[int, int]) -> dict[str, np.ndarray]:
    """The weights of the reference values by their column suffix."""
    found = {"unit": np.ones(n, np.int64), "seed": 1 + np.arange(n) * 7919 % 1000}
    if own:
        found["file"] = np.array([own.get(v, 1) for v in range(n)], np.int64)
    return found
