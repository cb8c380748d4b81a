"""Force against truth: error over stance, bias, and whether the covariance says the truth about the error."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.stats import chi2

from footcal.records import BoolArray, FloatArray


@dataclass(frozen=True, slots=True)
class ForceScore:
    """Force figures over all legs; per cent are of the robot's weight."""

    vertical_rmse_N: float  # over true stance
    vertical_rmse_pct: float
    vector_rmse_N: float
    vector_rmse_pct: float
    vertical_bias_N: float
    swing_rmse_N: float  # vector, over true swing
    nees_stance_mean: float  # over its 3 dimensions: 1 is honest
    nees_stance_inside_pct: float  # inside the two-sided 95 % bounds
    nees_swing_mean: float
    nees_swing_below_pct: float  # below the upper 95 % bound
    swing_width_pct: float  # mean 2-sigma width of the vertical in swing
    nis_mean: float  # over the number of readings; NaN where the innovations are not at hand
    nis_inside_pct: float


def _full(cov: FloatArray) -> FloatArray:
    """Return (n, 3, 3) from xx, xy, xz, yy, yz, zz."""
    return cov[:, [0, 1, 2, 1, 3, 4, 2, 4, 5]].reshape(-1, 3, 3)


def nees(error_N: FloatArray, cov_N2: FloatArray) -> FloatArray:
    """Return e' P^-1 e, shape (n,), for errors (n, 3) and covariances (n, 6)."""
    return np.asarray(np.einsum("ni,ni->n", error_N, np.linalg.solve(_full(cov_N2), error_N[:, :, None])[:, :, 0]))


def _mean(values: FloatArray | BoolArray) -> float:
    return float(np.mean(values)) if len(values) else float("nan")


def _rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2))) if len(values) else float("nan")


def _inside(values: FloatArray, dof: FloatArray | float) -> BoolArray:
    return np.asarray((values >= chi2.ppf(0.025, dof)) & (values <= chi2.ppf(0.975, dof)))


def score_force(
    error_N: FloatArray,
    cov_N2: FloatArray,
    stance: BoolArray,
    weight_N: float,
    innovations: tuple[FloatArray, FloatArray] | None,
) -> ForceScore:
    """Return all force figures.

    Args:
        error_N: estimate less truth, (n, legs, 3), z vertical; rows with NaN (no truth) are left out.
        cov_N2: (n, legs, 6), same axes.
        stance: true contact, (n, legs).
        weight_N: weight of the robot.
        innovations: normalised innovation squared and its dimension, both (n, legs), where at hand.
    """
    told = np.isfinite(error_N[..., 2])
    whole = told & np.isfinite(error_N).all(axis=-1)
    on, off = whole & stance, whole & ~stance
    on_nees, off_nees = nees(error_N[on], cov_N2[on]), nees(error_N[off], cov_N2[off])
    vertical, vector = error_N[told & stance][:, 2], np.linalg.norm(error_N[on], axis=-1)
    nis_mean, nis_inside = float("nan"), float("nan")
    if innovations is not None:
        used = stance & (innovations[1] > 0)
        nis, dof = innovations[0][used], innovations[1][used]
        nis_mean, nis_inside = _mean(nis / dof), 100.0 * _mean(_inside(nis, dof))
    return ForceScore(
        vertical_rmse_N=_rms(vertical),
        vertical_rmse_pct=100.0 * _rms(vertical) / weight_N,
        vector_rmse_N=_rms(vector),
        vector_rmse_pct=100.0 * _rms(vector) / weight_N,
        vertical_bias_N=_mean(vertical),
        swing_rmse_N=_rms(np.linalg.norm(error_N[off], axis=-1)),
        nees_stance_mean=_mean(on_nees) / 3.0,
        nees_stance_inside_pct=100.0 * _mean(_inside(on_nees, 3.0)),
        nees_swing_mean=_mean(off_nees) / 3.0,
        nees_swing_below_pct=100.0 * _mean(off_nees <= chi2.ppf(0.975, 3.0)),
        swing_width_pct=100.0 * _mean(4.0 * np.sqrt(cov_N2[off][:, 5])) / weight_N,
        nis_mean=nis_mean,
        nis_inside_pct=nis_inside,
    )
