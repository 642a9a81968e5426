"""Triangulation: which pairs to add so that the graph becomes chordal."""

from nearchord_solve.fill.cores import Cores, find_cores, triangulate

__all__ = ["Cores", "find_cores", "triangulate"]
