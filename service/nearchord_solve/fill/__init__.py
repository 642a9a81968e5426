"""Triangulation: which pairs to add so that the graph becomes chordal."""

from .cores import Cores, find_cores, triangulate

__all__ = ["Cores", "find_cores", "triangulate"]
