"""Cycle cuts for the general solvers: cycles in a choice, a shortest one through each edge that closes some."""

from collections import deque

from bench.problem import Problem

Neighbours = list[list[int]]


def neighbours(problem: Problem) -> Neighbours:
    """Adjacent vertices of each vertex."""
    ptr, adjacent = problem.symmetric()
    listed, bounds = adjacent.tolist(), ptr.tolist()
    return [listed[bounds[v] : bounds[v + 1]] for v in range(problem.n)]


def closed(near: Neighbours, chosen: set[int]) -> list[list[int]]:
    """Cycles of the graph on the chosen vertices, none if it is a forest: for each edge that closes one, a shortest."""
    root = {v: v for v in chosen}

    def find(v: int) -> int:
        while root[v] != v:
            root[v] = root[root[v]]
            v = root[v]
        return v

    found = []
    for v in sorted(chosen):
        for u in near[v]:
            if u > v and u in root:
                if find(u) == find(v):
                    found.append(_shortest(near, chosen, u, v))
                else:
                    root[find(u)] = find(v)
    return found


def _shortest(near: Neighbours, chosen: set[int], start: int, goal: int) -> list[int]:
    """Shortest cycle through the edge start-goal: a shortest path between them without it."""
    before = {start: start}
    waiting = deque([start])
    while waiting:
        v = waiting.popleft()
        for u in near[v]:
            if u not in chosen or u in before or (v == start and u == goal):
                continue
            before[u] = v
            waiting.append(u)
            if u == goal:
                waiting.clear()
                break
    path = [goal]
    while path[-1] != start:
        path.append(before[path[-1]])
    return path
