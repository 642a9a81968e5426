"""Kernels of the colouring questions, each beside the statement of what it computes."""
