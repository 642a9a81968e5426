"""Exact solutions of systems of linear equations with small whole coefficients.

Dixon, Exact solution of linear equations using p-adic expansions, Numer. Math. 40 (1982) 137-141: invert the matrix
modulo a prime p, find the solution digit by digit to the base p, and read the fractions off the digits.
"""

from math import gcd

import numpy as np

from nearchord_solve.arrays import I64

PRIME = 2**31 - 1
DIGITS = 8  # enough for numerators and denominators that int64 can hold
Solution = tuple[list[int], int]


def solve_exactly(matrix: I64, right: I64) -> Solution | None:
    """x with ``matrix`` x = ``right`` as (numerators, common denominator > 0).

    ``matrix`` int64[k, k], entries below 2**8 in size, k < 2**20; ``right`` int64[k], below 2**62.  None if the matrix
    is singular modulo the prime, or if the fractions are longer than int64 can hold.  O(k**3) words.
    """
    inverse = _inverse(matrix)
    if inverse is None:
        return None
    left = right.astype(np.int64)
    digits = []
    for _ in range(DIGITS):
        digit = _product(inverse, left % PRIME)
        digits.append(digit)
        left = (left - matrix @ digit) // PRIME  # divides exactly
    values = [0] * right.size
    for digit in reversed(digits):
        values = [value * PRIME + d for value, d in zip(values, digit.tolist(), strict=True)]
    found = _fractions(values, PRIME**DIGITS)
    return found if found is not None and _holds(matrix, right, *found) else None


def _inverse(matrix: I64) -> I64 | None:
    """The inverse modulo the prime; all products stay below 2**62."""
    k = matrix.shape[0]
    work = np.concatenate((matrix % PRIME, np.eye(k, dtype=np.int64)), axis=1)
    for i in range(k):
        pivots = np.flatnonzero(work[i:, i])
        if not pivots.size:
            return None
        pivot = i + int(pivots[0])
        if pivot != i:
            work[[i, pivot]] = work[[pivot, i]]
        work[i] = work[i] * pow(int(work[i, i]), -1, PRIME) % PRIME
        others = np.flatnonzero(work[:, i])
        others = others[others != i]
        work[others] = (work[others] - work[others, i, None] * work[i]) % PRIME
    inverse: I64 = work[:, k:]
    return inverse


def _product(matrix: I64, vector: I64) -> I64:
    """Matrix times vector modulo the prime."""
    total: I64 = (matrix * vector % PRIME).sum(axis=1) % PRIME
    return total


def _fractions(values: list[int], modulus: int) -> Solution | None:
    """Fractions over one denominator that are congruent to ``values``, if there are short ones."""
    denominator = 1
    for value in values:
        more = _denominator(value * denominator % modulus, modulus)
        if more is None:
            return None
        denominator *= more
        if denominator >= 2**62:
            return None
    numerators = [value * denominator % modulus for value in values]
    return [x - modulus if 2 * x > modulus else x for x in numerators], denominator


def _denominator(value: int, modulus: int) -> int | None:
    """The least q > 0 for which q * value is small modulo ``modulus``, by the steps of Euclid's algorithm."""
    most = 2**124
    before, now = (modulus, value) if 2 * value <= modulus else (modulus, modulus - value)
    q_before, q_now = 0, 1
    while now >= most:
        quotient = before // now
        before, now = now, before - quotient * now
        q_before, q_now = q_now, q_before + quotient * q_now
        if q_now >= 2**62:
            return None
    return q_now


def _holds(matrix: I64, right: I64, numerators: list[int], denominator: int) -> bool:
    """The equations themselves, in whole numbers of any size."""
    if numerators and gcd(denominator, *numerators) < 1:
        return False
    left = matrix.astype(object) @ np.array(numerators, object) if numerators else []
    return all(x == r * denominator for x, r in zip(left, right.tolist(), strict=True))
