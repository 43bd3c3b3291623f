"""Interpolation as matrices, and tables that end where the model ends."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array

SINGLE_THREAD_WORK = 200_000  # multiplications; OpenBLAS begins to share at 262 144


def lagrange(at: Array, nodes: Array) -> Array:
    """Weights, shape (at, nodes), of the polynomial through all nodes."""
    weights = np.ones((at.size, nodes.size))
    for j, node in enumerate(nodes):
        for other in np.delete(nodes, j):
            weights[:, j] *= (at - other) / (node - other)
    return weights


def local_cubic(at: Array, nodes: Array) -> Array:
    """Weights, shape (at, nodes), of the cubic through the four nodes nearest around each place."""
    first = np.clip(np.searchsorted(nodes, at) - 2, 0, nodes.size - 4)
    weights = np.zeros((at.size, nodes.size))
    for start in np.unique(first):
        rows = first == start
        weights[rows, start : start + 4] = lagrange(at[rows], nodes[start : start + 4])
    return weights


def product(left: Array, right: Array) -> Array:
    """The matrix product, rows in parts so small that the linear algebra library does not share them over threads.

    On a machine that is busy (drawing, another worker) waiting for a second thread costs far more than it gains.
    """
    rows = max(SINGLE_THREAD_WORK // (left.shape[1] * right.shape[1]), 1)
    if left.shape[0] <= rows:
        return left @ right
    return np.concatenate([left[start : start + rows] @ right for start in range(0, left.shape[0], rows)])


def end_nodes(low: float, high: float, count: int) -> Array:
    """Nodes from low to high, denser towards the ends (Chebyshev and Lobatto), rising."""
    return low + (high - low) * 0.5 * (1.0 - np.cos(np.pi * np.arange(count) / (count - 1)))


def extended(table: Array, nodes: Array, axis: int, *, downward: bool) -> Array:
    """The table with missing entries (NaN) continued straight along an axis, from where it is known.

    downward: the unknown lies at the low end of the axis. Entries so made only carry the curve up to the border of
    the model; whoever reads a value beyond the border is told so by its size.
    """
    moved = np.moveaxis(table.copy(), axis, 0)
    order = range(nodes.size - 3, -1, -1) if downward else range(2, nodes.size)
    back = 1 if downward else -1
    for k in order:
        near, far = moved[k + back], moved[k + 2 * back]
        straight = near + (near - far) * (nodes[k] - nodes[k + back]) / (nodes[k + back] - nodes[k + 2 * back])
        moved[k] = np.where(np.isnan(moved[k]), straight, moved[k])
    return np.moveaxis(moved, 0, axis)
