"""Kernels of the sweeps: states of bags, the messages between them, and the passes over the tree."""
