"""Numba kernels: arrays and scalars only, `out` last, no class, no file, no printing.

Every array has one ghost layer on all four sides (see `ibsolver.grid.staggered`). Loops run over row ranges
that the caller gives, so a kernel knows no boundary condition: ghosts are filled before it is called.
"""
