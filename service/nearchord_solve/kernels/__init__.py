"""Compiled kernels: flat numpy arrays in, flat numpy arrays out, no Python objects and no recursion.

Every kernel runs without the interpreter lock and is cached on disk.  Kernels that may run long take the
``cells`` array of :class:`nearchord_solve.monitor.Monitor` and look at its ``STOP`` cell at loop boundaries.
"""
