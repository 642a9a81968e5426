"""Compiled kernels of the exact search: flat numpy arrays in and out.

Bit rows are those of :mod:`nearchord_solve.fill.kernels.dense`: uint64[n, W], bit j of row i says that i and j are
adjacent.
"""
