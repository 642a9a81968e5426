"""Recognition of chordal, interval and split graphs, each with what confirms it."""

from nearchord_solve.recognise.chordal import Chordal, find_chordless, recognise_chordal
from nearchord_solve.recognise.interval import Interval, recognise_interval
from nearchord_solve.recognise.split import Split, recognise_split

__all__ = [
    "Chordal",
    "Interval",
    "Split",
    "find_chordless",
    "recognise_chordal",
    "recognise_interval",
    "recognise_split",
]
