"""Passes over the tree of bags."""

from .independent import Swept, sweep

__all__ = ["Swept", "sweep"]
