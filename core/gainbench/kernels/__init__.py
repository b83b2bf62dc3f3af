"""Compiled inner loops (numba), and nothing else: each module is imported by the function that needs it.

Importing this package is free, as are the modules that only hold records and grids; importing one with a kernel loads
numba. Kernels take and return plain arrays, scalars and named tuples, keep no state, release the interpreter's lock and
are kept on disk: :mod:`gainbench.kernels.compiled` says how.
"""
