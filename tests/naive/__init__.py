"""Slow, plain twins of the kernels, written from the formulas and not from the kernels."""
