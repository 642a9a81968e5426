"""Errors of the solver: bad arguments only.  A budget that runs out is a result, not an error.

::

    SolverError        a bad argument; ``field`` names it
    └── GraphError     a bad graph; ``row`` is the first offending row
"""


class SolverError(ValueError):
    """A bad argument.

    ``field`` is the dotted name of the argument, such as ``weights`` or ``question.must``.
    """

    def __init__(self, field: str, message: str) -> None:
        super().__init__(f"{field}: {message}")
        self.field = field
        self.message = message


class GraphError(SolverError):
    """A graph that is not in canonical form; ``row`` is the first offending row, or None if it is none."""

    def __init__(self, message: str, row: int | None = None) -> None:
        super().__init__("graph", message)
        self.row = row
