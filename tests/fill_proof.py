"""Checks of exact-fill answers, written from the definitions; they share no code with the solver."""

from fractions import Fraction
from itertools import combinations, pairwise, product

import networkx as nx
from nearchord_solve.fill.exact import Branch, FillResult, Packing, PieceProof, ProofKind

Pair = tuple[int, int]


def confirm(graph: nx.Graph, result: FillResult) -> None:
    """The fill makes the graph chordal and none of it can be spared; all bounds that come with a proof hold."""
    fill = [(int(u), int(v)) for u, v in result.edges]
    assert fill == sorted({(u, v) for u, v in fill if u < v})
    assert not any(graph.has_edge(u, v) for u, v in fill)
    assert result.upper_bound == len(fill)
    assert result.lower_bound <= result.upper_bound
    assert result.lower_bound == sum(piece.bound for piece in result.pieces)
    assert is_chordal(graph, fill)
    assert not spare(graph, fill)
    weakest = max((piece.kind for piece in result.pieces), key=list(ProofKind).index, default=ProofKind.PACKING)
    assert result.proof is (weakest if result.lower_bound == result.upper_bound else ProofKind.NONE)
    non_edges = [inner_non_edges(graph, piece) for piece in result.pieces]
    assert sum(map(len, non_edges)) == len(set().union(*non_edges))
    for piece in result.pieces:
        confirm_piece(graph, piece)


def is_chordal(graph: nx.Graph, added: list[Pair]) -> bool:
    """By networkx."""
    filled = graph.copy()
    filled.add_edges_from(added)
    return nx.is_chordal(filled) if filled.number_of_nodes() else True


def spare(graph: nx.Graph, fill: list[Pair]) -> list[Pair]:
    """Pairs of a triangulation's fill without which the graph is still chordal.

    If there are none, no proper subset of the fill does either (Rose, Tarjan, Lueker, SIAM J. Comput. 5 (1976)
    266-283).  Leaving out uv makes a chordless cycle u, x, v, y exactly where common neighbours x, y are not adjacent;
    large graphs are checked that way, small ones by networkx.
    """
    if graph.number_of_nodes() <= 64:
        return [pair for pair in fill if is_chordal(graph, [other for other in fill if other != pair])]
    filled = graph.copy()
    filled.add_edges_from(fill)
    return [
        (u, v)
        for u, v in fill
        if all(filled.has_edge(x, y) for x, y in combinations(nx.common_neighbors(filled, u, v), 2))
    ]


def inner_non_edges(graph: nx.Graph, piece: PieceProof) -> set[Pair]:
    """Pairs of the piece that are not edges."""
    return {pair for pair in combinations(piece.vertices.tolist(), 2) if not graph.has_edge(*pair)}


def confirm_piece(graph: nx.Graph, piece: PieceProof) -> None:
    """The proof of one piece reaches its bound."""
    if piece.kind is ProofKind.PACKING:
        assert piece.packing is not None
        assert ceiling(packing_value(graph, piece, piece.packing, {})) >= piece.bound
    elif piece.kind is ProofKind.BRANCH:
        confirm_tree(graph, piece, piece.tree)
    else:
        assert piece.kind is ProofKind.SEARCH
        assert piece.packing is None
        assert piece.tree == ()


def confirm_tree(graph: nx.Graph, piece: PieceProof, tree: tuple[Branch, ...]) -> None:
    """Every leaf of the tree of cases reaches the bound of the piece, and the cases are exhaustive."""
    open_cases: list[tuple[int, dict[Pair, int]]] = [(0, {})]
    visited = 0
    while open_cases:
        number, decided = open_cases.pop()
        visited += 1
        node = tree[number]
        if node.pair is None:
            assert node.packing is not None
            assert ceiling(packing_value(graph, piece, node.packing, decided)) >= piece.bound
            continue
        assert not graph.has_edge(*node.pair)
        assert node.pair not in decided
        open_cases.append((node.added, {**decided, node.pair: 1}))
        open_cases.append((node.forbidden, {**decided, node.pair: 0}))
    assert visited == len(tree)


def rings(packing: Packing) -> list[list[list[int]]]:
    """The groups of each ring."""
    groups = [packing.vertex[a:b].tolist() for a, b in pairwise(packing.group.tolist())]
    return [groups[a:b] for a, b in pairwise(packing.ring.tolist())]


def packing_value(graph: nx.Graph, piece: PieceProof, packing: Packing, decided: dict[Pair, int]) -> Fraction:
    """What the packing proves: the inequality of each ring times its multiplier, summed.

    A fill is a 0/1 vector x.  For a choice of one vertex from each group of a ring with c groups, x over the chords
    minus (c - 3) times x over the open sides is at least (c - 3)(1 - open sides); the ring stands for the mean over
    all choices.  The sum over the rings bounds load * x from below, and load * x <= x + max(0, load - 1).
    """
    assert packing.denominator > 0
    constant = Fraction(0)
    load: dict[Pair, Fraction] = {}
    for ring, numerator in zip(rings(packing), packing.numerators.tolist(), strict=True):
        assert numerator > 0
        c = len(ring)
        vertices = [v for group in ring for v in group]
        assert c >= 4
        assert len(vertices) == len(set(vertices))
        assert set(vertices) <= set(piece.vertices.tolist())
        y = Fraction(numerator, packing.denominator)
        open_sides = 0
        for i, j in combinations(range(c), 2):
            pairs = [(min(p), max(p)) for p in product(ring[i], ring[j])]
            joined = [graph.has_edge(*pair) for pair in pairs]
            if j - i in (1, c - 1):
                assert len(set(joined)) == 1
                if joined[0]:
                    continue
                open_sides += 1
                coefficient = Fraction(3 - c)
            else:
                assert not any(joined), "a chord in the graph"
                coefficient = Fraction(1)
            for pair in pairs:
                load[pair] = load.get(pair, Fraction(0)) + coefficient * y / len(pairs)
        constant += y * (c - 3) * (1 - open_sides)
    for pair in set(load) | set(decided):
        amount = load.get(pair, Fraction(0))
        if pair not in decided:
            constant -= max(Fraction(0), amount - 1)
        elif decided[pair]:
            constant += 1 - amount
    return constant


def ceiling(value: Fraction) -> int:
    """The least integer not below."""
    return -(-value.numerator // value.denominator)
