"""What the inward pass took from which vertex, written down as cliques and shares of cores; see :mod:`..proof`."""

from nearchord_solve.kernels.compiled import I32, I64, U8, kernel
from nearchord_solve.kernels.layout import Cover, Forest, Numbering


@kernel
def count_split(numbering: Numbering, residual: I64, cover: Cover) -> tuple[int, int]:
    """Room that :func:`split_weights` needs: (cliques, their entries)."""
    cliques = cover.cliques[0]
    entries = cover.ptr[cliques]
    for i in range(residual.shape[0]):
        if numbering.core[i] < 0 and residual[i] > 0:
            cliques += 1
            entries += 1 + numbering.low_ptr[i + 1] - numbering.low_ptr[i]
    return cliques, entries


@kernel
def write_clique(i: int, gain: int, numbering: Numbering, need: I64, clique_place: I32, entry: int) -> int:
    """Write i and those of L(i) that still need weight; returns where the next clique begins."""
    clique_place[entry] = i
    entry += 1
    for e in range(numbering.low_ptr[i], numbering.low_ptr[i + 1]):
        u = numbering.low[e]
        if need[u] > 0:
            need[u] -= gain
            clique_place[entry] = u
            entry += 1
    return entry


@kernel
def trim_shares(core: int, forest: Forest, share: I64, need: I64) -> None:
    """Bring the shares of one core down to what its vertices need."""
    for s in range(forest.core_slot[core], forest.core_slot[core + 1]):
        p = forest.slot_place[s]
        share[s] = max(0, min(share[s], need[p]))
        need[p] -= share[s]


@kernel
def split_weights(
    numbering: Numbering, forest: Forest, fits: U8, residual: I64, share: I64, cover: Cover, need: I64,
    clique_ptr: I64, clique_place: I32, clique_weight: I64,
) -> tuple[int, int]:  # fmt: skip
    """Go through the places as the inward pass did and write down every clique it took weight by.

    ``residual`` int64[n], ``share`` int64[slots], ``cover``: as the inward pass left them; ``share`` is trimmed.
    ``need`` int64[n] holds the weights by place and is overwritten.  ``clique_*`` are overwritten.  Returns (cliques,
    entries).  Every vertex gets its weight, and from shares and its last clique at most more: no sum exceeds the
    sum of the weights.  O(n + m).
    """
    cliques = cover.cliques[0]
    entry = cover.ptr[cliques]
    clique_place[:entry] = cover.place[:entry]
    clique_ptr[: cliques + 1] = cover.ptr[: cliques + 1]
    clique_weight[:cliques] = cover.weight[:cliques]
    for k in range(cliques):
        for e in range(cover.ptr[k], cover.ptr[k + 1]):
            need[cover.place[e]] -= cover.weight[k]
    for i in range(residual.shape[0] - 1, -1, -1):
        c = numbering.core[i]
        if c < 0:
            if residual[i] > 0:
                clique_weight[cliques] = residual[i]
                entry = write_clique(i, residual[i], numbering, need, clique_place, entry)
                cliques += 1
                clique_ptr[cliques] = entry
        elif forest.core_top[c] == i and fits[c]:
            trim_shares(c, forest, share, need)
    return cliques, entry
