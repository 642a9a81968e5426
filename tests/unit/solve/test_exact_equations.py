"""Systems of linear equations solved in fractions."""

from fractions import Fraction

import numpy as np
import pytest
from nearchord_solve.colouring.rational import solve_exactly


@pytest.mark.parametrize("size", [0, 1, 2, 5, 12, 40])
def test_solutions_hold_in_whole_numbers(size: int) -> None:
    """Random 0-1 systems with right sides up to the largest demands; None only where they cannot be written."""
    rng = np.random.default_rng(size)
    for _ in range(10):
        matrix = (rng.random((size, size)) < 0.4).astype(np.int64) + np.eye(size, dtype=np.int64)
        right = rng.integers(0, 2**61, size)
        found = solve_exactly(matrix, right)
        if found is None:
            assert size == 40 or abs(np.linalg.det(matrix)) < 0.5
            continue
        numerators, denominator = found
        left = [sum(int(a) * x for a, x in zip(row, numerators, strict=True)) for row in matrix]
        assert [Fraction(value, denominator) for value in left] == right.tolist()


def test_a_singular_system_has_no_answer() -> None:
    assert solve_exactly(np.ones((2, 2), np.int64), np.array([1, 2])) is None


def test_fractions_longer_than_int64_are_refused() -> None:
    """Powers of three down the diagonal: the last one needs 3 to the 63rd."""
    size = 63
    matrix = 3 * np.eye(size, dtype=np.int64)
    matrix[np.arange(1, size), np.arange(size - 1)] = -1
    right = np.zeros(size, np.int64)
    right[0] = 1
    assert solve_exactly(matrix, right) is None
    assert solve_exactly(matrix[:30, :30], right[:30]) == ([3 ** (29 - i) for i in range(30)], 3**30)
