"""A solver that never gets warm: it keeps its process busy without looking up."""

from __future__ import annotations

import numpy as np


def warm_up(report):
    report(1, 2)
    while True:
        np.sort(np.arange(100_000)[::-1])
