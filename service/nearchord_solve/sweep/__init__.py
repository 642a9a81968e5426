"""Passes over the tree of bags."""

from nearchord_solve.sweep.independent import Swept, sweep

__all__ = ["Swept", "sweep"]
