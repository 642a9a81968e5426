"""What vertices are called on the command line."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

Names = Sequence[str] | None
Label = str | int


class Labels:
    """Calls vertices by their names, as numbers where every name of the graph is one (DIMACS files), and by their
    numbers from 0 where there are no names."""

    def __init__(self, names: Names) -> None:
        self._names: Sequence[Label] | None = names
        if names is not None and all(map(_is_decimal, names)):
            self._names = [int(name) for name in names]

    def of(self, vertices: Iterable[int | str]) -> list[Label]:
        """The labels of vertices."""
        numbers = [int(vertex) for vertex in vertices]
        return list(numbers) if self._names is None else [self._names[number] for number in numbers]


def _is_decimal(name: str) -> bool:
    return name.isdecimal() and str(int(name)) == name
