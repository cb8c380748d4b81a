"""Covariance of the coefficients, rows of one hold taken as what they are: not independent.

C = (X^T V^-1 X + Lambda)^-1, Lambda the priors, V in blocks a hold: s^2 diag(1/w) + s_place^2 F^2 1 1^T (Woodbury a
block); pump rows count n (1 - rho) / (1 + rho) of n. C is then scaled so that the hold means left out with their cycle
have chi^2 per degree of freedom 1. Generalised least squares: textbook (Aitken 1935).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.fit.passes import Fitted
from footcal.fit.priors import prior_rows
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.records import BoolArray, FloatArray
from footcal.sensor.model import N_FEATURES, N_UNCERTAINTY_ROWS


@dataclass(frozen=True, slots=True)
class Placement:
    """Scatter of the holds, shares."""

    row: float  # of full scale, one row
    relative: float  # of the load, one placement


def placement_scatter(rows: Rows, residual: FloatArray) -> Placement:
    """Return the scatter inside holds and, beyond it, between placements in proportion to the load."""
    holds = ~rows.pump
    inner, means, loads = [], [], []
    for hold in np.unique(rows.hold[holds]):
        mine = residual[rows.hold == hold]
        inner.append(mine - mine.mean())
        means.append(mine.mean())
        loads.append(rows.target[rows.hold == hold][0])
    row = robust_sd(np.concatenate(inner)) * np.sqrt(6.0 / 5.0)
    mean, load = np.array(means), np.array(loads)
    high = load > 0.3 * load.max()
    excess = robust_sd(mean[high]) ** 2 - robust_sd(mean[~high]) ** 2 if (~high).any() else robust_sd(mean) ** 2
    typical = float(np.median(load[high])) if high.any() else 1.0
    return Placement(max(row, 1e-7), float(np.sqrt(max(excess, 0.0))) / max(typical, 1e-6))


def coefficient_covariance(fitted: Fitted, rows: Rows, left_out_cycles: FloatArray) -> FloatArray:
    """Return the covariance of all 32 coefficients, shape (32, 32); zero where a term was not fitted."""
    active = fitted.terms.active()
    columns = fitted.features[:, active]
    place = placement_scatter(rows, fitted.residual)
    information = prior_rows(active, fitted.creep_rms)
    normal = information.T @ information
    for hold in np.unique(rows.hold[~rows.pump]):
        mine = rows.hold == hold
        normal += _block_information(columns[mine], fitted.huber[mine] * rows.weight[mine], rows.target[mine], place)
    pump = rows.pump
    if pump.any():
        normal += _pump_information(columns[pump], fitted.residual[pump], fitted.scale[pump][0])
    covariance = np.asarray(np.linalg.inv(0.5 * (normal + normal.T)), dtype=np.float64)
    covariance *= _hold_scale(columns, rows, left_out_cycles, covariance, place)
    full = np.zeros((N_FEATURES, N_FEATURES))
    full[np.ix_(active, active)] = 0.5 * (covariance + covariance.T)
    return full


def _block_information(x: FloatArray, weight: FloatArray, target: FloatArray, place: Placement) -> FloatArray:
    """X^T V^-1 X of one hold, V = diag + rank one, by the Sherman-Morrison formula."""
    inverse = weight / place.row**2
    common = place.relative * float(target[0])
    plain = (x * inverse[:, None]).T @ x
    if common == 0.0:
        return plain
    summed = x.T @ inverse
    return plain - np.outer(summed, summed) * common**2 / (1.0 + common**2 * float(inverse.sum()))


def _pump_information(x: FloatArray, residual: FloatArray, scale: float) -> FloatArray:
    """X^T X over the variance of pump rows, with as many rows as their autocorrelation leaves independent."""
    centred = residual - residual.mean()
    rho = float(np.clip(centred[1:] @ centred[:-1] / max(centred @ centred, 1e-300), 0.0, 0.999))
    share = (1.0 - rho) / (1.0 + rho)
    return share * (x.T @ x) / scale**2


def _hold_scale(
    columns: FloatArray, rows: Rows, left_out: FloatArray, covariance: FloatArray, place: Placement
) -> float:
    """Return the factor that brings the left-out hold means to chi^2 per degree of freedom 1 (never below 1)."""
    ratios = []
    for hold in np.unique(rows.hold[~rows.pump]):
        mine = rows.hold == hold
        if not np.isfinite(left_out[mine]).all():
            continue
        phi = columns[mine].mean(axis=0)
        variance = place.row**2 / mine.sum() + (place.relative * rows.target[mine][0]) ** 2 + phi @ covariance @ phi
        ratios.append(float(left_out[mine].mean()) ** 2 / variance)
    if len(ratios) < 5:
        return 4.0  # too few to tell: twice the stated standard deviation
    kept = np.sort(ratios)[: max(1, round(0.98 * len(ratios)))]
    return max(1.0, float(np.mean(kept)))


def runtime_rows(covariance: FloatArray, features: FloatArray, active: BoolArray) -> FloatArray:
    """Return eight rows whose squared products with the features sum to nearly phi^T C phi, shape (8, 32).

    Of all factors of that size they keep the most of the mean variance over the features seen: with G = mean phi phi^T
    = L L^T, the leading eigenvectors of L^T C L, mapped back.
    """
    seen = features[:, active]
    size = seen.shape[1]
    gram = seen.T @ seen / len(seen)
    lower = np.linalg.cholesky(gram + 1e-12 * float(np.trace(gram)) * np.eye(size))
    values, vectors = np.linalg.eigh(lower.T @ covariance[np.ix_(active, active)] @ lower)
    top = np.argsort(values)[::-1][:N_UNCERTAINTY_ROWS]
    rows = np.zeros((N_UNCERTAINTY_ROWS, N_FEATURES))
    scaled = vectors[:, top] * np.sqrt(np.maximum(values[top], 0.0))
    rows[: len(top), active] = np.linalg.solve(lower.T, scaled).T
    return rows
