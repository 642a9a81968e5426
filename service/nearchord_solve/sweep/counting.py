"""How many independent sets are best, exactly.

*Counts in the manner of values.*  Let N(t), for a part t of an adhesion, be the number of ways in which what hangs
from it can be chosen at best, given t.  The inward pass splits the best value M(t) over the base, the residuals of
single vertices and kept parts; counts are split likewise, with products for sums: N(empty) goes to the count, N({u})
/ N(empty) to the ratio of u, and N(t) N(empty)^(|t| - 1) / (product of N({u}) over u in t) is kept.  A place i
outside cores, with residual r and ratio q, is chosen at best in q ways to 1 in which it is not: with none of L(i)
chosen that makes q ways if r > 0, 1 + q if r = 0 and 1 if r < 0; with one of them chosen, i is not, in 1 way.  In a
bag with fill N(t) is the sum, over the states that add up to M(t), of the products of ratios and kept parts that they
meet.  What has been divided is multiplied again wherever the same message is met, so that the count at the end is the
sum over all best sets of one: every set is one sequence of states (:mod:`.best_sets`), and it is best if each of them
is.

*A program.*  All this is written down once as a program of additions, multiplications and divisions
(:mod:`.kernels.tally`); ratios that no tie has touched are one and leave no trace in it.  It is run on logarithms,
which bounds the count, and then on residues.

*The bound.*  Rounding an operation multiplies its result by e^d with |d| <= D.  Follow a d through the program.  A
register that is a divisor elsewhere is a message's normaliser: it is divided out of every ratio and kept part of the
message and multiplied into the count, always with the same rounded value, so its own rounding cancels, except in the
term of the message that it was the value of.  All other roundings belong to one term of one message.  So the result
is the sum over all best sets of e^(sum of some d's), each of the T operations occurring at most once, up to sign: it
is off by a factor within e^(+-T D), however small the differences were that ratios are made of.  Logarithms of
absolute value up to A are rounded with D <= 2^-50 (A + 1).

*Residues.*  Fractions a/b are kept as pairs, so that nothing is inverted: as integers, a = count * b for the last
pair, and where b is not 0 modulo the prime p, the count is a/b modulo p.  Primes with b = 0 are left out and others
taken.  The count is below the product of the primes and follows from its residues.
"""

from collections.abc import Iterator
from math import ceil, log

import numpy as np

from nearchord_solve.arrays import I32
from nearchord_solve.kernels.layout import BAG_FILL, Tries
from nearchord_solve.monitor import Monitor
from nearchord_solve.sweep.independent import Swept
from nearchord_solve.sweep.kernels import lanes, tally
from nearchord_solve.sweep.kernels.passes import link_bags, senders

MOST_LANES = 64
PRIME_BITS = 30  # each prime used exceeds 2 to this
WINDOW = 1 << 17  # more than the root of the largest prime


class OutOfRoom(Exception):
    """The program does not fit into the memory given."""


def count_best(swept: Swept, most_bytes: int, monitor: Monitor) -> int | None:
    """Number of independent sets of the greatest weight; None if stopped.

    Raises OutOfRoom if the program or its registers would take more than ``most_bytes``.  O(n + m + best states) to
    write the program; each 31 bits of the count cost one run of it.
    """
    written = _program(swept, most_bytes, monitor)
    if written is None:
        return None
    code, steps, registers = written
    if steps == 1:
        return 1
    bits = _most_bits(code, steps, registers)
    width = min(MOST_LANES, 8 * ceil((bits / PRIME_BITS + 1) / 8))
    if registers * width * 8 > most_bytes:
        width = max(8, most_bytes // (8 * registers) // 8 * 8)
    if registers * width * 8 + code.nbytes > most_bytes:
        raise OutOfRoom
    return _from_residues(code, steps, registers, bits, width, monitor)


def _program(swept: Swept, most_bytes: int, monitor: Monitor) -> tuple[I32, int, int] | None:
    """(instructions, how many, registers); None if stopped.  It is written anew where the first guess was too short."""
    numbering = swept.structure.numbering
    most_bytes -= sum(array.nbytes for array in swept.tries)
    tries = Tries(*(array.copy() for array in swept.tries))
    alive = ((swept.residual >= 0) | (numbering.core >= 0)).astype(np.uint8)
    room = numbering.low.size + 4 * numbering.order.size + 4 * swept.structure.states
    while True:
        if 12 * room > most_bytes:
            raise OutOfRoom
        registers = tally.Registers(
            np.full(swept.residual.size, -1), np.full(tries.label.size, -1), alive, np.zeros(3, np.int64)
        )
        code = np.empty(3 * room, np.int32)
        registers.used[2] = tally.fresh(code, registers.used)
        if not _write(swept, tries, code, registers, most_bytes // 12, monitor):
            return None
        if registers.used[0] <= room:
            return code, int(registers.used[0]), int(registers.used[1])
        room = int(registers.used[0])


def _write(
    swept: Swept, tries: Tries, code: I32, registers: tally.Registers, most: int, monitor: Monitor
) -> bool:  # fmt: skip
    """Write the program along the inward pass; False if stopped.  Raises OutOfRoom above ``most`` instructions."""
    numbering, forest = swept.structure.numbering, swept.structure.forest
    links = link_bags(forest.bag_above, forest.bag_kind)
    where = np.full(forest.slot_place.size, -1, np.int32)
    kept = int(tries.end.max(initial=0))
    high = swept.residual.size
    tops = np.argsort(-forest.core_top)
    for core in [*tops.tolist(), -1]:
        low = int(forest.core_top[core]) if core >= 0 else 0
        tally.settle_places(high, low, numbering, swept.residual, code, registers, monitor.cells)
        high = low
        bags = range(int(forest.core_bag[core + 1]) - 1, int(forest.core_bag[core]) - 1, -1) if core >= 0 else ()
        for b in bags:
            if forest.bag_kind[b] & BAG_FILL:
                tally.settle_bag(b, forest, senders(b, *links), tries, kept, where, swept.residual, code, registers)
            else:
                tally.settle_plain(b, forest, swept.residual, code, registers)
        if monitor.stop:
            return False
        if registers.used[0] > most:
            raise OutOfRoom
    return True


def _most_bits(code: I32, steps: int, registers: int) -> float:
    """The count is less than 2 to this."""
    result, most = lanes.run_logarithms(code, steps, np.empty(registers, np.float64))
    return float((result + steps * 2.0**-50 * (most + 1)) / log(2)) + 1


def _from_residues(code: I32, steps: int, registers: int, bits: float, width: int, monitor: Monitor) -> int | None:
    moduli: list[int] = []
    residues: list[int] = []
    product = 1
    primes = primes_below(2**31)
    while product.bit_length() <= bits:
        chosen = np.array([next(primes) for _ in range(width)], np.uint32)
        number, below = np.empty((registers, width), np.uint32), np.empty((registers, width), np.uint32)
        if not lanes.run_residues(code, steps, chosen, number, below, monitor.cells):
            return None
        for p, a, b in zip(chosen.tolist(), number[0].tolist(), below[0].tolist(), strict=True):
            if b:
                moduli.append(p)
                residues.append(a * pow(b, -1, p) % p)
                product *= p
    return remainder(moduli, residues, product)


def primes_below(top: int) -> Iterator[int]:
    """Primes from just below ``top`` downwards, by a sieve over one window after the other."""
    while top > 2 * WINDOW:
        begin = top - WINDOW
        root = int(top**0.5) + 1
        prime = np.ones(WINDOW, bool)
        for q in _small_primes(root):
            prime[-begin % q :: q] = False
        yield from (begin + np.flatnonzero(prime)[::-1]).tolist()
        top = begin


def _small_primes(most: int) -> list[int]:
    prime = np.ones(most + 1, bool)
    prime[:2] = False
    for q in range(2, int(most**0.5) + 1):
        if prime[q]:
            prime[q * q :: q] = False
    return np.flatnonzero(prime).tolist()


def remainder(moduli: list[int], residues: list[int], product: int) -> int:
    """The least number with these residues modulo distinct primes of this product.  O(k^2) words for k primes."""
    total = 0
    for p, r in zip(moduli, residues, strict=True):
        rest = product // p
        total += r * pow(rest % p, -1, p) % p * rest
    return total % product
