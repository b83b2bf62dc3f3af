"""Compiled inner loops (numba), and nothing else: each module is imported by the function that needs it.

Importing this package is free; importing one of its modules loads numba. Kernels take and return plain
arrays and scalars, keep no state, release the GIL and are cached on disk.
"""
