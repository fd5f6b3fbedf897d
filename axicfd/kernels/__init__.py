"""Numba kernels: arrays in, arrays out. They check nothing and know no class but plain bundles of arrays."""
