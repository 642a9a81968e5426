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

from nearchord_solve.arrays import I32, I64
from nearchord_solve.fill.exact.branch import CaseSearch
from nearchord_solve.fill.exact.core import Core, Pair, pair_array
from nearchord_solve.fill.exact.engines import first_bounds, search_core
from nearchord_solve.fill.exact.greedy import minimal
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

    ``fill``: the cheapest fill found, in vertices of the part.  ``relaxation`` is kept while the bounds are apart.
    ``lower``: the best lower bound; ``packed``: the one that the multipliers in ``bounds`` prove.
    """

    core: Core
    bounds: Bounds
    relaxation: Relaxation | None
    fill: list[Pair]
    lower: int
    packed: int
    tree: tuple[Branch, ...] = ()

    @property
    def closed(self) -> bool:
        """Whether the fill is known to be a minimum one."""
        return self.lower >= len(self.fill)

    @property
    def packing(self) -> Packing | None:
        """The packing that proves ``lower``, if the multipliers do."""
        if self.lower > self.packed:
            return None
        return packing_of(self.core, self.bounds.cycles, self.bounds.numerators)

    @property
    def narrow(self) -> bool:
        """Whether a few cases may close the gap."""
        return len(self.fill) - self.lower <= 2 + self.lower // 25


def minimum_fill(ptr: I64, adj: I32, limit: int | None, monitor: Monitor) -> FillResult:
    """Fewest edges whose addition makes a part chordal.

    ``ptr`` int64[n+1], ``adj`` int32: symmetric rows of the part.  ``limit``: stop as soon as the fill number is known
    to be larger.  When the monitor says stop, the bounds reached stand.  Exponential in the worst case; deterministic
    unless stopped.
    """
    return fill_of_parts([(ptr, adj)], limit, monitor)[0]


def fill_of_parts(parts: Sequence[tuple[I64, I32]], limit: int | None, monitor: Monitor) -> list[FillResult]:
    """Minimum fill of independent parts; ``limit`` is for their sum.

    All parts are bounded before any is searched, so that a limit that is too small shows early.
    """
    most = UNLIMITED if limit is None else limit
    cores = [Core.from_rows(ptr, adj) for ptr, adj in parts]
    pieces = bounded_parts(cores, monitor)
    everything = sorted((piece for own in pieces for piece in own), key=lambda piece: piece.core.n)
    lower = sum(piece.lower for piece in everything)
    for piece in everything:
        if lower > most or monitor.stop:
            break
        if not piece.closed:
            lower -= piece.lower
            search_piece(piece, most - lower, monitor)
            lower += piece.lower
        monitor.cells[Monitor.FILL_LOWER] = lower
    return [summed(core, own, lower > most) for core, own in zip(cores, pieces, strict=True)]


def bounded_parts(cores: Sequence[Core], monitor: Monitor) -> list[list[Piece]]:
    """The atoms of each part, bounded: small ones first, so that a stop finds most of them done."""
    atoms = [(number, atom) for number, core in enumerate(cores) for atom in decompose(core, monitor)]
    pieces: list[list[Piece]] = [[] for _ in cores]
    monitor.enter(Phase.FILL, len(atoms))
    for step, (number, atom) in enumerate(sorted(atoms, key=lambda item: item[1].n)):
        pieces[number].append(bounded(atom, monitor))
        monitor.cells[Monitor.STEP] = step + 1
    return pieces


def bounded(atom: Core, monitor: Monitor) -> Piece:
    """Portfolio and packing bound of an atom."""
    core = contract_twins(atom)
    bounds = first_bounds(core, monitor)
    relaxation = None if monitor.stop else cut(core, bounds, UNLIMITED, monitor)
    kept = None if bounds.closed else relaxation
    return Piece(core, bounds, kept, core.lift(bounds.best), bounds.lower, bounds.lower)


def search_piece(piece: Piece, most: int, monitor: Monitor) -> None:
    """Close the gap of an atom, or show that it needs more than ``most`` edges."""
    if not (piece.narrow and by_cases(piece, most, monitor)):
        by_engines(piece, most, monitor)
    piece.relaxation = None


def by_cases(piece: Piece, most: int, monitor: Monitor) -> bool:
    """Try a few cases; whether they settled it.  They are a proof if no case is about several pairs at once."""
    assert piece.relaxation is not None
    cases = CaseSearch(piece.core, piece.relaxation, piece.bounds, most, monitor)
    settled = cases.run(PROOF_NODES)
    found = piece.core.lift(piece.bounds.best)
    if len(found) < len(piece.fill):
        piece.fill = found
    if settled:
        piece.lower = piece.bounds.lower
        if cases.checkable:
            piece.tree = tuple(cases.tree)
    return settled


def by_engines(piece: Piece, most: int, monitor: Monitor) -> None:
    """Reduce the atom further and search each of its cores."""
    reduced = reduce_core(piece.core, monitor)
    states = [first_bounds(core, monitor) for core in reduced.cores]
    lower = len(reduced.added)
    for core, state in zip(reduced.cores, states, strict=True):
        if monitor.stop:
            break
        search_core(core, state, most - lower, monitor)
        lower += state.lower
        if lower > most:
            break
    found = list(reduced.added)
    for core, state in zip(reduced.cores, states, strict=True):
        found += core.lift(state.best)
    if len(found) < len(piece.fill):
        piece.fill = found
    piece.lower = max(piece.lower, lower)


def summed(core: Core, pieces: list[Piece], over: bool) -> FillResult:
    """The answer for one part: fills together, made minimal; bounds added up."""
    fill = minimal(core, [pair for piece in pieces for pair in piece.fill])
    lower = sum(piece.lower for piece in pieces)
    proofs = [proof_of(piece) for piece in pieces]
    order = list(ProofKind)
    weakest = max((proof.kind for proof in proofs), key=order.index, default=ProofKind.PACKING)
    kind = weakest if lower == len(fill) else ProofKind.NONE
    return FillResult(pair_array(fill), lower, len(fill), kind, tuple(proofs), over)


def proof_of(piece: Piece) -> PieceProof:
    """What backs the lower bound of an atom."""
    vertices = tuple(sorted(v for group in piece.core.classes for v in group))
    if len(piece.tree) > 1:
        return PieceProof(ProofKind.BRANCH, vertices, piece.lower, None, piece.tree)
    packing = piece.tree[0].packing if piece.tree else piece.packing
    if packing is None:
        return PieceProof(ProofKind.SEARCH, vertices, piece.lower)
    return PieceProof(ProofKind.PACKING, vertices, piece.lower, packing)
