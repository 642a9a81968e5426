"""Minimum fill of parts: decompose, bound, and search where the bounds do not meet.

1. Split into atoms and contract true twins (module :mod:`reduce`, rules 1, 2, 4).
2. For each atom take a fill from a portfolio and a packing bound by cutting planes.  Where they meet, the packing is
   the proof.
3. Where they nearly meet, try a few cases by branch and cut: the tree is the proof.
4. Elsewhere apply the safe edges (rule 3) and search what remains with the engine that fits; there is no proof but
   the search itself.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import NO_PAIRS, Core
from nearchord_solve.fill.exact.engines import first_bounds, search_core
from nearchord_solve.fill.exact.greedy import PRODUCTS, completed, is_large, minimal
from nearchord_solve.fill.exact.kernels.greedy import BY_DEGREE
from nearchord_solve.fill.exact.packing import packing_of
from nearchord_solve.fill.exact.reduce import contract_twins, decompose, reduce_core
from nearchord_solve.fill.exact.relaxation import Relaxation
from nearchord_solve.fill.exact.result import Branch, FillResult, Packing, PieceProof, ProofKind
from nearchord_solve.fill.exact.root import Bounds, cut
from nearchord_solve.monitor import Monitor, Phase

UNLIMITED = 2**62
PROOF_NODES = 150


@dataclass
class Piece:
    """An atom without twins, and what is known about its fill number.

    ``fill`` int32[k, 2]: the cheapest fill found, in vertices of the part.  ``relaxation`` is kept while the bounds are
    apart, and never made for large cores.  ``lower``: the best lower bound; ``packed``: the one that the multipliers in
    ``bounds`` prove.
    """

    core: Core
    bounds: Bounds
    relaxation: Relaxation | None
    fill: I32
    lower: int
    packed: int
    tree: tuple[Branch, ...] = ()

    @property
    def upper(self) -> int:
        """Edges of the fill."""
        return int(self.fill.shape[0])

    @property
    def closed(self) -> bool:
        """Whether the fill is known to be a minimum one."""
        return self.lower >= self.upper

    @property
    def packing(self) -> Packing | None:
        """The packing that proves ``lower``, if the multipliers do."""
        if self.lower > self.packed:
            return None
        return packing_of(self.core, self.bounds.cycles, self.bounds.multipliers)

    @property
    def narrow(self) -> bool:
        """Whether a few cases may close the gap."""
        return self.upper - self.lower <= 2 + self.lower // 25

    def take(self, fill: I32) -> None:
        """Keep a fill if it is cheaper."""
        if fill.shape[0] < self.upper:
            self.fill = fill


@dataclass
class Tally:
    """The bounds of all parts as they are known, kept in the monitor's cells: ``fills[i]`` and ``lowers[i]``."""

    fills: list[int]
    lowers: list[int]
    monitor: Monitor
    fill: int = 0  # sum of fills
    lower: int = 0  # sum of lowers: all parts together need so many

    def __post_init__(self) -> None:
        self.fill, self.lower = sum(self.fills), sum(self.lowers)
        self._show()

    @classmethod
    def blank(cls, parts: int, monitor: Monitor) -> "Tally":
        """Nothing is known."""
        return cls([UNLIMITED] * parts, [0] * parts, monitor)

    def without(self, number: int, pieces: Sequence["Piece"], piece: "Piece") -> int:
        """Fill edges that are needed outside one atom of a part."""
        return self.lower - self.lowers[number] + sum(other.lower for other in pieces if other is not piece)

    def note(self, number: int, pieces: Sequence["Piece"]) -> None:
        """Take over what the atoms of a part say."""
        fill = min(self.fills[number], sum(piece.upper for piece in pieces))
        lower = max(self.lowers[number], sum(piece.lower for piece in pieces))
        self.fill += fill - self.fills[number]
        self.lower += lower - self.lowers[number]
        self.fills[number], self.lowers[number] = fill, lower
        self._show()

    def _show(self) -> None:
        cells = self.monitor.cells
        cells[Monitor.FILL_LOWER] = self.lower
        if self.fill < UNLIMITED:
            cells[Monitor.FILL] = self.fill


def minimum_fill(ptr: I64, adj: I32, limit: int | None, monitor: Monitor) -> FillResult:
    """Fewest edges whose addition makes a part chordal.

    ``ptr`` int64[n+1], ``adj`` int32: symmetric rows of the part.  ``limit``: stop as soon as the fill number is known
    to be larger.  When the monitor says stop, the bounds reached stand.  Exponential in the worst case; deterministic
    unless stopped.
    """
    found = fill_of_parts([(ptr, adj)], limit, monitor)[0]
    if found is not None:
        return found
    core = Core.from_rows(ptr, adj)
    fill = completed(core, BY_DEGREE, PRODUCTS, np.zeros(core.n))
    return FillResult(fill, 0, fill.shape[0], ProofKind.NONE if fill.size else ProofKind.PACKING, (), False)


def fill_of_parts(
    parts: Sequence[tuple[I64, I32]], limit: int | None, monitor: Monitor, tally: Tally | None = None
) -> list[FillResult | None]:
    """Minimum fill of independent parts; ``limit`` is for their sum.

    All parts are bounded before any is searched, so that a limit that is too small shows early.  ``tally``: what is
    known about each part beforehand.  None for parts of which some atom was not bounded before a stop, or before the
    limit was seen to be too small.
    """
    tally = tally or Tally.blank(len(parts), monitor)
    most = UNLIMITED if limit is None else limit
    cores = [Core.from_rows(ptr, adj) for ptr, adj in parts]
    pieces = bounded_parts(cores, most, tally, monitor)
    known = [(number, own) for number, own in enumerate(pieces) if own is not None]
    waiting = [(number, own, piece) for number, own in known for piece in own if not piece.closed]
    monitor.enter(Phase.IMPROVE, len(waiting))
    for step, (number, own, piece) in enumerate(sorted(waiting, key=lambda item: item[2].core.n)):
        if tally.lower > most or monitor.stop:
            break
        search_piece(piece, most - tally.without(number, own, piece), monitor)
        tally.note(number, own)
        monitor.cells[Monitor.STEP] = step + 1
    over = tally.lower > most
    return [None if own is None else summed(core, own, over, monitor) for core, own in zip(cores, pieces, strict=True)]


def bounded_parts(cores: Sequence[Core], most: int, tally: Tally, monitor: Monitor) -> list[list[Piece] | None]:
    """The atoms of each part, bounded: small ones first, so that a stop finds most of them done."""
    monitor.enter(Phase.FILL, len(cores))
    atoms: list[tuple[int, Core]] = []
    due = [0] * len(cores)
    pieces: list[list[Piece] | None] = [None] * len(cores)
    for number, core in sorted(enumerate(cores), key=lambda item: item[1].n):
        if monitor.stop:
            return pieces
        own = decompose(core, monitor)
        due[number] = len(own)
        monitor.cells[Monitor.STEP] += 1
        atoms += [(number, atom) for atom in own]
    monitor.enter(Phase.FILL, len(atoms))
    done: list[list[Piece]] = [[] for _ in cores]
    for step, (number, atom) in enumerate(sorted(atoms, key=lambda item: item[1].n)):
        if monitor.stop or tally.lower > most:
            break
        most_here = most - tally.lower - sum(piece.lower for piece in done[number])
        piece = bounded(atom, most_here, monitor)
        if piece is None:
            break
        done[number].append(piece)
        if len(done[number]) == due[number]:
            pieces[number] = done[number]
            tally.note(number, done[number])
        monitor.cells[Monitor.STEP] = step + 1
    return pieces


def bounded(atom: Core, most: int, monitor: Monitor) -> Piece | None:
    """Portfolio and packing bound of an atom; a bound above ``most`` is good enough.  None: stopped in a large one."""
    core = contract_twins(atom)
    bounds = first_bounds(core, monitor)
    if bounds is None:
        return None
    relaxation = None if monitor.stop or is_large(core) else cut(core, bounds, most, monitor)
    kept = None if bounds.closed else relaxation
    return Piece(core, bounds, kept, core.lift(bounds.best), bounds.lower, bounds.lower)


def search_piece(piece: Piece, most: int, monitor: Monitor) -> None:
    """Close the gap of an atom, or show that it needs more than ``most`` edges."""
    if not (piece.narrow and by_cases(piece, most, monitor)):
        by_engines(piece, most, monitor)
    piece.relaxation = None


def by_cases(piece: Piece, most: int, monitor: Monitor) -> bool:
    """Try a few cases; whether they settled it.  They are a proof if no case is about several pairs at once."""
    if piece.relaxation is None:
        return False
    cases = CaseSearch(piece.core, piece.relaxation, piece.bounds, most, monitor)
    settled = cases.run(PROOF_NODES)
    piece.take(piece.core.lift(piece.bounds.best))
    if settled:
        piece.lower = piece.bounds.lower
        if cases.checkable:
            piece.tree = tuple(cases.tree)
    return settled


def by_engines(piece: Piece, most: int, monitor: Monitor) -> None:
    """Reduce the atom further and search each of its cores."""
    reduced = reduce_core(piece.core, monitor)
    states = [first_bounds(core, monitor) for core in reduced.cores]
    found = [NO_PAIRS, reduced.added]
    lower = reduced.added.shape[0]
    for core, state in zip(reduced.cores, states, strict=True):
        if state is None:
            return
        if lower <= most and not monitor.stop:
            search_core(core, state, most - lower, monitor)
            lower += state.lower
        found.append(core.lift(state.best))
    piece.take(np.concatenate(found))
    piece.lower = max(piece.lower, lower)


def summed(core: Core, pieces: list[Piece], over: bool, monitor: Monitor) -> FillResult:
    """The answer for one part: fills together, made minimal; bounds added up."""
    fill = minimal(core, np.concatenate([NO_PAIRS, *(piece.fill for piece in pieces)]), monitor.cells)
    lower = sum(piece.lower for piece in pieces)
    proofs = [proof_of(piece) for piece in pieces]
    order = list(ProofKind)
    weakest = max((proof.kind for proof in proofs), key=order.index, default=ProofKind.PACKING)
    kind = weakest if lower == fill.shape[0] else ProofKind.NONE
    return FillResult(fill, lower, fill.shape[0], kind, tuple(proofs), over)


def proof_of(piece: Piece) -> PieceProof:
    """What backs the lower bound of an atom."""
    vertices = piece.core.vertices
    if len(piece.tree) > 1:
        return PieceProof(ProofKind.BRANCH, vertices, piece.lower, None, piece.tree)
    packing = piece.tree[0].packing if piece.tree else piece.packing
    if packing is None:
        return PieceProof(ProofKind.SEARCH, vertices, piece.lower)
    return PieceProof(ProofKind.PACKING, vertices, piece.lower, packing)
