"""Transforms with the eigenvectors of a stretched axis: blocks of BLAS products, one thread a block.

A field f[t, s] is taken to modes along t and stored as g[s, k], modes contiguous, which is what the tridiagonal
sweep over s wants. Where the stretch is symmetric the modes are even or odd about the middle, and folding the
field first halves the work (`split` = 1); otherwise there is one family (`split` = 0).

The number of blocks is fixed, so the bits do not depend on the number of threads; BLAS itself must run on one.
"""

from __future__ import annotations

import numpy as np

from ibsolver.kernels._jit import parallel_kernel, prange


@parallel_kernel
def forward(f, split, even, odd, part_even, part_odd, modes_even, modes_odd):
    """Transform ``f`` to modes.

    Parameters
    ----------
    f : ndarray, shape (nt, ns)
        Field; any memory order.
    split : int
        1 to fold into even and odd parts, 0 not to.
    even, odd : ndarray, shape (nt_half, k_even), (nt_half, k_odd)
        Weighted eigenvectors on the first half (the whole axis where ``split`` is 0; `odd` is then not used).
    part_even, part_odd : ndarray, shape (blocks, nt_half, width)
        Scratch. Modified in place.
    modes_even, modes_odd : ndarray, shape (blocks * width, k_even), (blocks * width, k_odd)
        Modified in place.
    """
    nt, ns = f.shape
    blocks, _, width = part_even.shape
    half = odd.shape[0]
    for b in prange(blocks):
        first = b * width
        count = max(0, min(width, ns - first))
        if split == 1:
            for t in range(half):
                for s in range(count):
                    low, high = f[t, first + s], f[nt - 1 - t, first + s]
                    part_even[b, t, s] = low + high
                    part_odd[b, t, s] = low - high
            if nt > 2 * half:
                for s in range(count):
                    part_even[b, half, s] = f[half, first + s]
            np.dot(part_odd[b].T, odd, modes_odd[first : first + width])
        else:
            for t in range(nt):
                for s in range(count):
                    part_even[b, t, s] = f[t, first + s]
        np.dot(part_even[b].T, even, modes_even[first : first + width])


@parallel_kernel
def backward(modes_even, modes_odd, split, even, odd, part_even, part_odd, out):
    """Transform modes back to a field, the inverse of `forward`.

    Parameters
    ----------
    even, odd : ndarray
        Inverse-weighted eigenvectors, shapes as in `forward`.
    out : ndarray, shape (nt, ns)
        Modified in place; any memory order.
    """
    nt, ns = out.shape
    blocks, _, width = part_even.shape
    half = odd.shape[0]
    for b in prange(blocks):
        first = b * width
        count = max(0, min(width, ns - first))
        np.dot(even, modes_even[first : first + width].T, part_even[b])
        if split == 1:
            np.dot(odd, modes_odd[first : first + width].T, part_odd[b])
            for t in range(half):
                for s in range(count):
                    a, c = part_even[b, t, s], part_odd[b, t, s]
                    out[t, first + s] = a + c
                    out[nt - 1 - t, first + s] = a - c
            if nt > 2 * half:
                for s in range(count):
                    out[half, first + s] = part_even[b, half, s]
        else:
            for t in range(nt):
                for s in range(count):
                    out[t, first + s] = part_even[b, t, s]
