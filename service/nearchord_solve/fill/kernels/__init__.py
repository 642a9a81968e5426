"""Kernels that triangulate fill cores and write them down as bags."""
