"""What the command line asks of a scenario."""

from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True)
class Options:
    """``quick``: small sizes, to see that everything runs; ``seconds``: limit of each solver run, None = usual."""

    out: Path
    quick: bool = False
    seconds: float | None = None
    threads: tuple[int, ...] = (1,)
    seed: int = 1
