"""The best choice in one bag of a proof for each choice in its adhesion, by trying all independent sets of the bag."""

from __future__ import annotations

from dataclasses import dataclass

Table = dict[tuple[int, ...], int]


class TooManyStates(Exception):
    """There is more to try than a check may take; its text says what, where that is not plain."""


@dataclass(frozen=True)
class Bag:
    """`vertices`, the first `lead` of them the adhesion; `gains` by position; `free`: pairs of positions that are not
    adjacent, the smaller first; `below`: adhesions and tables of what hangs from this bag."""

    vertices: list[int]
    lead: int
    gains: list[int]
    free: list[tuple[int, int]]
    below: list[tuple[list[int], Table]]


def best_by_adhesion(bag: Bag, most: int) -> tuple[Table, int]:
    """For each independent set of the adhesion, as an ascending tuple of vertices, what the bag and all below it come
    to at most; and how many states were tried. TooManyStates above `most`. Iterative; each set is met once, by
    ascending positions, so that what it has of the adhesion comes first.
    """
    allowed = [0] * len(bag.vertices)
    for i, j in bag.free:
        allowed[i] |= 1 << j
    meeting = _meeting(bag)
    base = sum(table[()] for _, table in bag.below)
    table: Table = {(): base}
    states = 1
    open_sets: list[tuple[tuple[int, ...], int, int, tuple[int, ...]]] = [
        ((position,), 0, allowed[position], ()) for position in range(len(bag.vertices))
    ]
    while open_sets:
        positions, gain, later, key = open_sets.pop()
        states += 1
        if states > most:
            raise TooManyStates
        last = positions[-1]
        gain += bag.gains[last]
        if last < bag.lead:
            key = tuple(sorted((*key, bag.vertices[last])))
        value = base + gain + _from_below(bag, positions, meeting)
        if value > table.get(key, value - 1):
            table[key] = value
        while later:
            lowest = later & -later
            later ^= lowest
            position = lowest.bit_length() - 1
            open_sets.append(((*positions, position), gain, allowed[position] & _after(allowed, positions), key))
    return table, states


def _after(allowed: list[int], positions: tuple[int, ...]) -> int:
    mask = -1
    for position in positions:
        mask &= allowed[position]
    return mask


def _meeting(bag: Bag) -> list[list[int]]:
    """By position: what hangs from this bag by an adhesion with the vertex there."""
    place = {vertex: position for position, vertex in enumerate(bag.vertices)}
    meeting: list[list[int]] = [[] for _ in bag.vertices]
    for child, (adhesion, _) in enumerate(bag.below):
        for vertex in adhesion:
            meeting[place[vertex]].append(child)
    return meeting


def _from_below(bag: Bag, positions: tuple[int, ...], meeting: list[list[int]]) -> int:
    """How much the choice changes what comes from below, against choosing nothing."""
    chosen: dict[int, list[int]] = {}
    for position in positions:
        for child in meeting[position]:
            chosen.setdefault(child, []).append(bag.vertices[position])
    change = 0
    for child, vertices in chosen.items():
        table = bag.below[child][1]
        change += table[tuple(sorted(vertices))] - table[()]
    return change
