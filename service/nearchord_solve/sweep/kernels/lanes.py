"""Programs of :mod:`.tally`, run on logarithms and on fractions modulo primes."""

import numpy as np

from nearchord_solve.kernels.cells import POLL, STOP
from nearchord_solve.kernels.compiled import I32, I64, U32, kernel
from nearchord_solve.sweep.kernels.tally import OVER, PLUS, START, STEP, TIMES

HALF = np.uint64(32)
TWO = np.uint64(2)
WORD = np.uint64(2**32 - 1)


@kernel
def run_logarithms(code: I32, steps: int, value: I64) -> tuple[float, float]:
    """The natural logarithm of the result, and the largest absolute value of any register.

    ``code`` int32[3 * steps]; ``value`` float64[registers] is overwritten.
    """
    most = 0.0
    for t in range(steps):
        what = code[3 * t]
        target = code[3 * t + 1]
        source = code[3 * t + 2]
        if what == START:
            value[target] = 0.0
            continue
        if what == TIMES:
            value[target] += value[source]
        elif what == OVER:
            value[target] -= value[source]
        else:
            one = value[target]
            other = 0.0 if what == STEP else value[source]
            if one < other:
                one, other = other, one
            value[target] = one + np.log1p(np.exp(other - one))
        if value[target] > most:
            most = value[target]
        elif -value[target] > most:
            most = -value[target]
    return value[0], most


@kernel
def run_residues(code: I32, steps: int, prime: U32, number: U32, below: U32, cells: I64) -> bool:
    """Run on fractions ``number`` / ``below`` modulo primes, one in each lane; False if stopped.

    ``prime`` uint32[L], odd, below 2**31; ``number``, ``below`` uint32[registers, L] are overwritten with residues
    times 2**32 (Montgomery, Mathematics of Computation 44 (1985) 519-521): a product t < p * 2**32 is reduced to
    (t + p * (t * -1/p mod 2**32)) / 2**32, which is below 2 p.  Nothing exceeds 2**63.
    """
    lanes = prime.shape[0]
    p = np.empty(lanes, np.uint64)
    inverse = np.empty(lanes, np.uint64)  # -1/p modulo 2**32
    unit = np.empty(lanes, np.uint32)  # 2**32 modulo p
    spare = np.empty(lanes, np.uint32)
    for k in range(lanes):
        p[k] = prime[k]
        root = p[k]
        for _ in range(5):
            root = root * (TWO - p[k] * root)
        inverse[k] = ~root + np.uint64(1) & WORD
        unit[k] = np.uint32((WORD + np.uint64(1)) % p[k])
    for t in range(steps):
        if (t & POLL) == 0 and cells[STOP] != 0:
            return False
        what = code[3 * t]
        target = code[3 * t + 1]
        source = code[3 * t + 2]
        a, b = number[target], below[target]
        if what == START:
            for k in range(lanes):
                a[k] = unit[k]
                b[k] = unit[k]
        elif what == STEP:
            _plus(a, b, p)
        elif what == TIMES:
            _times(a, number[source], a, p, inverse)
            _times(b, below[source], b, p, inverse)
        elif what == OVER:
            _times(a, below[source], a, p, inverse)
            _times(b, number[source], b, p, inverse)
        elif what == PLUS:
            _times(a, below[source], a, p, inverse)
            _times(b, number[source], spare, p, inverse)
            _times(b, below[source], b, p, inverse)
            _plus(a, spare, p)
    return True


@kernel
def _times(one: U32, other: U32, product: U32, p: I64, inverse: I64) -> None:
    for k in range(p.shape[0]):
        t = np.uint64(one[k]) * np.uint64(other[k])
        m = ((t & WORD) * inverse[k]) & WORD
        r = (t + m * p[k]) >> HALF
        product[k] = np.uint32(min(r, r - p[k]))  # r - p wraps to something huge where r < p


@kernel
def _plus(one: U32, other: U32, p: I64) -> None:
    for k in range(p.shape[0]):
        r = np.uint64(one[k]) + np.uint64(other[k])
        one[k] = np.uint32(min(r, r - p[k]))
