"""Many small linear systems at once: the last axis counts points."""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array

SERIAL_PRODUCT = 2**18
"""Multiply-adds below which OpenBLAS stays on one thread; its threads cost a factor 4-15 at these sizes."""

FEW = 64
"""Points up to which one LAPACK call beats elimination by array operations, whose call overhead then dominates."""


def product(a: Array, b: Array, out: Array | None = None) -> Array:
    """a (m, k) @ b (k, N), in blocks of columns small enough for one thread; (m, N)."""
    if a.size * b.shape[1] < SERIAL_PRODUCT:
        return np.matmul(a, b, out=out)
    result = np.empty((a.shape[0], b.shape[1])) if out is None else out
    step = max(1, SERIAL_PRODUCT // a.size - 1)
    for i in range(0, b.shape[1], step):
        np.matmul(a, b[:, i : i + step], out=result[:, i : i + step])
    return result


def dot(a: Array, b: Array) -> Array:
    """Sum over rows of a * b, both (k, N); (N,)."""
    total: Array = np.add.reduce(a * b) if b.shape[1] <= FEW else np.einsum("ij,ij->j", a, b)
    return total


def solve_systems(matrices: Array, right: Array) -> None:
    """Solve the N systems matrices (n, n, N) x = right (n, q, N); `right` becomes x, `matrices` is used up.

    The matrices are symmetric with a positive definite leading part (all but the last row and column), so elimination
    needs no pivoting. A singular system gives non-finite numbers in its own column only.
    """
    if matrices.shape[2] <= FEW and _solve_few(matrices, right):
        return
    _eliminate(matrices, right)


def _solve_few(matrices: Array, right: Array) -> bool:
    """By LAPACK, scaled to a unit diagonal because rows of trace potentials are as small as 1e-40."""
    n, _, points = matrices.shape
    diagonal = matrices.reshape(n * n, points)[:: n + 1]
    scale = 1.0 / np.sqrt(np.maximum(diagonal, 1e-300))
    scale[-1] = 1.0
    column = scale[:, None]
    try:
        x = np.linalg.solve((matrices * scale * column).transpose(2, 0, 1), (right * column).transpose(2, 0, 1))
    except np.linalg.LinAlgError:
        return False
    np.multiply(x.transpose(1, 2, 0), column, out=right)
    return True


def _eliminate(matrices: Array, right: Array) -> None:
    """Gauss-Jordan forward and back substitution, row operations on all points together."""
    n, q, points = right.shape
    room_a, room_x = np.empty((n - 1, n - 1, points)), np.empty((n - 1, q, points))
    for k in range(n):
        inverse = np.divide(1.0, matrices[k, k], out=matrices[k, k])
        right[k] *= inverse
        left = n - 1 - k
        if left == 0:
            break
        row, column = matrices[k, k + 1 :], matrices[k + 1 :, k, None]
        row *= inverse
        matrices[k + 1 :, k + 1 :] -= np.multiply(column, row, out=room_a[:left, :left])
        right[k + 1 :] -= np.multiply(column, right[k], out=room_x[:left])
    for k in range(n - 1, 0, -1):
        right[:k] -= np.multiply(matrices[:k, k, None], right[k], out=room_x[:k])
