"""Makes the demo's conflict graphs: an invented scenario in three kinds, the same bytes every time.

- `windows-*`: work windows on the Brindel-Osk corridor. Two windows conflict while they overlap in time, except for a
  few pairs that were cleared to run side by side. Without the cleared pairs the graph is an interval graph.
- `routes-*`: circuits over the Tavrin access tree. Two circuits conflict when they share a node of the tree, again
  with a few cleared pairs. Without them the graph is chordal (subtrees of a tree).
- `sites-*`: radio sites on the Lume plain. Two sites conflict when they stand closer than the separation distance.

Beside them stand `night-channels.txt` and `night-seasons.txt`, with how many channels the windows of one night need and
what they are worth in three seasons.

Every request has a value in the planner's smallest unit, which becomes its weight. Needs numpy and networkx:

    python deploy/demo/make_graphs.py [FOLDER]      (default: the folder `graphs` beside this script)
"""

from __future__ import annotations

import gzip
import io
import json
import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import networkx as nx
import numpy as np
from numpy.random import Generator

SEED = 20_031


@dataclass(frozen=True)
class Conflicts:
    """A conflict graph: one name and one value a request, edges as pairs of positions with the smaller one first."""

    title: str
    names: list[str]
    values: list[int]
    edges: list[tuple[int, int]]


def windows(n: int, cleared: int, rng: Generator) -> Conflicts:
    """Time windows of n requests, about six of which are open at any moment; `cleared` overlapping pairs dropped."""
    start = rng.integers(0, 60 * n, size=n)
    length = np.clip(rng.lognormal(5.6, 0.5, size=n), 30, 1_500).astype(np.int64)
    end = start + length
    order = np.argsort(start, kind="stable")
    edges = []
    for at, u in enumerate(order):
        for v in order[at + 1 :]:
            if start[v] >= end[u]:
                break
            edges.append((min(int(u), int(v)), max(int(u), int(v))))
    values = (length // 30 + 1) * rng.integers(1, 10, size=n)
    title = f"work windows on the Brindel-Osk corridor, {cleared} pairs cleared"
    return Conflicts(title, numbered("BO", n), values.tolist(), without(edges, cleared, rng))


def routes(n: int, cleared: int, rng: Generator) -> Conflicts:
    """Circuits of 2 to 5 nodes that climb a random access tree of 2 n nodes; `cleared` sharing pairs dropped."""
    nodes = 2 * n
    parent = [max(0, node - 1 - int(rng.integers(0, 40))) for node in range(nodes)]
    users: dict[int, list[int]] = {}
    for route in range(n):
        node = int(rng.integers(1, nodes))
        for _ in range(int(rng.integers(2, 6))):
            users.setdefault(node, []).append(route)
            if node == 0:
                break
            node = parent[node]
    edges = sorted({(u, v) for there in users.values() for i, u in enumerate(there) for v in there[i + 1 :]})
    values = rng.integers(10, 400, size=n)
    title = f"circuits over the Tavrin access tree, {cleared} pairs cleared"
    return Conflicts(title, numbered("TV", n), values.tolist(), without(edges, cleared, rng))


def sites(n: int, neighbours: float, rng: Generator) -> Conflicts:
    """Sites spread evenly over a square, with so large a separation distance that each has about `neighbours`."""
    place = rng.random((n, 2))
    separation = float(np.sqrt(neighbours / (np.pi * n)))
    apart = np.hypot(*(place[:, None, :] - place[None, :, :]).transpose(2, 0, 1))
    close = np.argwhere(np.triu(apart < separation, k=1))
    edges = [(int(u), int(v)) for u, v in close]
    values = rng.integers(100, 1_000, size=n)
    return Conflicts("radio sites on the Lume plain, too close together", numbered("LU", n), values.tolist(), edges)


def numbered(prefix: str, n: int) -> list[str]:
    """Request names such as BO-0042."""
    return [f"{prefix}-{i:04d}" for i in range(1, n + 1)]


def without(edges: list[tuple[int, int]], cleared: int, rng: Generator) -> list[tuple[int, int]]:
    """The edges, sorted, less `cleared` of them drawn at random."""
    edges = sorted(edges)
    gone = set(rng.choice(len(edges), size=cleared, replace=False).tolist())
    return [edge for i, edge in enumerate(edges) if i not in gone]


def as_dimacs(conflicts: Conflicts) -> bytes:
    """DIMACS edge format with `n` lines for the values; requests are known by their numbers from 1."""
    lines = [f"c {conflicts.title}", f"p edge {len(conflicts.names)} {len(conflicts.edges)}"]
    lines += [f"n {v} {value}" for v, value in enumerate(conflicts.values, start=1)]
    lines += [f"e {u + 1} {v + 1}" for u, v in conflicts.edges]
    return ("\n".join(lines) + "\n").encode()


def as_csv(conflicts: Conflicts) -> bytes:
    """CSV edge list with a header, an empty target where a request has no conflict; without values each counts 1."""
    busy = {end for edge in conflicts.edges for end in edge}
    rows = [f"{conflicts.names[u]},{conflicts.names[v]}" for u, v in conflicts.edges]
    rows += [f"{name}," for v, name in enumerate(conflicts.names) if v not in busy]
    return ("\n".join(["source,target", *rows]) + "\n").encode()


def as_networkx(conflicts: Conflicts) -> nx.Graph:
    """A networkx graph with the names as nodes and the values as the attribute `weight`."""
    graph = nx.Graph(title=conflicts.title)
    graph.add_nodes_from((name, {"weight": w}) for name, w in zip(conflicts.names, conflicts.values, strict=True))
    graph.add_edges_from((conflicts.names[u], conflicts.names[v]) for u, v in conflicts.edges)
    return graph


def as_graphml(conflicts: Conflicts) -> bytes:
    """GraphML with values as the node attribute `weight`."""
    out = io.BytesIO()
    nx.write_graphml(as_networkx(conflicts), out)
    return out.getvalue()


def as_node_link(conflicts: Conflicts) -> bytes:
    """Node-link JSON with values as the node attribute `weight`."""
    return (json.dumps(nx.node_link_data(as_networkx(conflicts), edges="edges"), indent=0) + "\n").encode()


def as_demands(conflicts: Conflicts, rng: Generator) -> bytes:
    """CSV of what each request needs: one channel, or now and then two or three."""
    needs = rng.choice([1, 2, 3], size=len(conflicts.names), p=[0.7, 0.2, 0.1])
    rows = [f"{name},{need}" for name, need in zip(conflicts.names, needs, strict=True)]
    return ("\n".join(["name,demand", *rows]) + "\n").encode()


def as_scenarios(conflicts: Conflicts, titles: tuple[str, ...], rng: Generator) -> bytes:
    """CSV of what each request is worth in some scenarios: from half to twice its value."""
    factors = rng.integers(50, 200, size=(len(conflicts.names), len(titles)))
    worths = np.array(conflicts.values)[:, None] * factors // 100
    rows = [",".join([name, *map(str, worth)]) for name, worth in zip(conflicts.names, worths.tolist(), strict=True)]
    return ("\n".join([",".join(["request", *titles]), *rows]) + "\n").encode()


def packed(write: Callable[[Conflicts], bytes]) -> Callable[[Conflicts], bytes]:
    """The same file gzipped, without a time stamp in it."""
    return lambda conflicts: gzip.compress(write(conflicts), compresslevel=9, mtime=0)


def main() -> None:
    """Write every graph of the demo."""
    folder = Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent / "graphs"
    folder.mkdir(parents=True, exist_ok=True)
    rng = np.random.default_rng(SEED)
    files = [
        ("windows-night.graphml", windows(60, 4, rng), as_graphml),
        ("windows-week.csv", windows(400, 12, rng), as_csv),
        ("windows-quarter.col.gz", windows(3_000, 60, rng), packed(as_dimacs)),
        ("routes-village.json", routes(80, 3, rng), as_node_link),
        ("routes-district.col", routes(600, 15, rng), as_dimacs),
        ("routes-region.col.gz", routes(4_000, 40, rng), packed(as_dimacs)),
        ("sites-valley.graphml", sites(50, 3.5, rng), as_graphml),
        ("sites-plain.json.gz", sites(300, 3.5, rng), packed(as_node_link)),
        ("sites-province.col", sites(1_500, 7.5, rng), as_dimacs),
    ]
    for name, conflicts, write in files:
        (folder / name).write_bytes(write(conflicts))
    night = files[0][1]
    (folder / "night-channels.txt").write_bytes(as_demands(night, rng))
    (folder / "night-seasons.txt").write_bytes(as_scenarios(night, ("dry", "wet", "frost"), rng))


if __name__ == "__main__":
    main()
