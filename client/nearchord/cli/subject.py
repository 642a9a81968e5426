"""What an answer is about, as far as it takes to put it into words."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import nearchord
from nearchord.cli.names import Labels, Names


@dataclass(frozen=True, eq=False)
class Subject:
    """The names of the vertices; where the answer speaks of edges, the graph; where they are known, the titles of the
    scenarios."""

    names: Names = None
    graph: nearchord.Graph | None = None
    titles: tuple[str, ...] = ()

    @classmethod
    def of(cls, graph: nearchord.Graph, titles: tuple[str, ...] = ()) -> Subject:
        """The subject of an answer about a graph that is at hand."""
        return cls(graph.names, graph, titles)

    @cached_property
    def labels(self) -> Labels:
        """What the vertices are called."""
        return Labels(self.names)

    def edges(self) -> list[tuple[int, int]]:
        """Both ends of every edge, in the order in which prices of conflicts stand."""
        if self.graph is None:
            return []
        u, v = self.graph.edges()
        return list(zip(u.tolist(), v.tolist(), strict=True))

    def title(self, scenario: int) -> str:
        """What a scenario is called: its number from 1 where it has no title."""
        return self.titles[scenario] if self.titles else str(scenario + 1)
