"""A polynomial through calibration points, with its covariance: the plain curve at the bottom of everything else."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from footcal.errors import FitRefusedError
from footcal.fit.least_squares import solve
from footcal.records import FloatArray


def curve(x: ArrayLike, y: ArrayLike, degree: int, *, intercept: bool = True) -> tuple[FloatArray, FloatArray]:
    """Return coefficients and covariance of y = b_0 + b_1 x + ... + b_degree x^degree by least squares.

    The powers are taken of x over its largest size, so that no column loses digits to another; coefficients come back
    in the units of the data.

    Args:
        x: shape (n,), n > degree.
        y: shape (n,).
        degree: highest power, at least 1 (0 with an intercept).
        intercept: False leaves b_0 out (a line through zero).

    Returns:
        Coefficients, shape (p,), lowest power first; covariance, shape (p, p), from the residual variance
        (NaN where there are no degrees of freedom left).

    Raises:
        FitRefusedError: lengths differ, values are not finite, too few or too similar points.

    >>> coefficients, _ = curve([0.0, 1.0, 2.0, 3.0], [1.0, 3.0, 5.0, 7.0], degree=1)
    >>> [round(float(b), 9) for b in coefficients]
    [1.0, 2.0]
    """
    points, values = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
    if points.ndim != 1 or points.shape != values.shape:
        raise FitRefusedError("curve", f"shapes {points.shape} and {values.shape} differ", "Give one y for each x.")
    if not (np.isfinite(points).all() and np.isfinite(values).all()):
        raise FitRefusedError("curve", "a value is not finite", "Remove or mend that point.")
    scale = float(np.max(np.abs(points), initial=0.0)) or 1.0
    powers = np.arange(0 if intercept else 1, degree + 1)
    solution = solve((points / scale)[:, None] ** powers, values)
    unscale = scale ** -powers.astype(np.float64)
    freedom = solution.rows - len(powers)
    variance = solution.residual_square_sum / freedom if freedom > 0 else float("nan")
    covariance = variance * solution.covariance_unscaled * np.outer(unscale, unscale)
    return solution.coefficients * unscale, covariance
