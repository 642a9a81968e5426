"""Compiled kernels of recognition: flat numpy arrays in and out, no recursion."""
