"""What the command line asks of a scenario."""

from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True)
class Options:
    """``quick``: small sizes, to see that everything runs; ``seconds``: limit of each solver run, None = usual.

    ``general``: whether the general-purpose solvers run; ``threads``: with how many threads.
    """

    out: Path
    quick: bool = False
    seconds: float | None = None
    general: bool = True
    threads: tuple[int, ...] = (1,)
    seed: int = 1
