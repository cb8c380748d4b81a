"""From left-out errors to what the runtime states: the constants of its standard uncertainty."""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.fit.choose import Candidate
from footcal.fit.covariance import coefficient_covariance, runtime_rows
from footcal.fit.passes import Reading
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.records import FloatArray
from footcal.sensor.model import RuntimeUncertainty

# Scatter between days and mountings, share of full scale at zero and share of force (common practice, no source).
DAY_ZERO: Final = {"cell": 0.0005, "resistive": 0.003, "magnetic": 0.002, "capacitive": 0.002}
DAY_SPAN: Final = {"cell": 0.00015, "resistive": 0.002, "magnetic": 0.0012, "capacitive": 0.0012}
# What an untested temperature does, share per kelvin of zero and span together (common practice, no source).
UNTESTED_PER_K: Final = {"cell": 0.0005, "resistive": 0.002, "magnetic": 0.001, "capacitive": 0.004}
UNTESTED_HALF_RANGE_K: Final = 10.0


def hold_means(rows: Rows, residual: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return mean residual and load of each hold that has residuals, shares of full scale."""
    known = ~rows.pump & np.isfinite(residual)
    index = np.unique(rows.hold[known])
    means = np.array([residual[known & (rows.hold == i)].mean() for i in index])
    loads = np.array([rows.target[rows.hold == i][0] for i in index])
    return means, loads


def fixed_and_relative(means: FloatArray, loads: FloatArray) -> tuple[float, float]:
    """Return the part of an error that is fixed (share of full scale) and the part in proportion to the load."""
    if len(means) < 4:
        return 0.0, 0.0
    top = float(np.max(np.abs(loads)))
    low = np.abs(loads) < 0.3 * top
    fixed = _rms(means[low]) if low.sum() > 2 else 0.5 * _rms(means)
    high = ~low
    excess = _rms(means[high]) ** 2 - fixed**2
    return fixed, float(np.sqrt(max(excess, 0.0)) / np.sqrt(np.mean(loads[high] ** 2)))


def _rms(values: FloatArray) -> float:
    kept = np.sort(np.abs(values))[: max(1, round(0.98 * len(values)))]
    return float(np.sqrt(np.mean(kept**2)))


def runtime_uncertainty(
    best: Candidate, rows: Rows, reading: Reading, kind: str, *, temperature_known: bool, reference_relative: float
) -> tuple[RuntimeUncertainty, FloatArray]:
    """Return the runtime's constants and the covariance of the coefficients, shape (32, 32).

    Args:
        best: the chosen fit with its left-out errors.
        rows: what was fitted.
        reading: the channel's noise.
        kind: sensor kind, for the stated day-to-day scatter.
        temperature_known: whether temperature terms were fitted.
        reference_relative: relative standard uncertainty common to all reference forces (gravity, weights).
    """
    fitted = best.fitted
    covariance = coefficient_covariance(fitted, rows, best.left_out.cycles)
    cycle_fixed, cycle_relative = fixed_and_relative(*hold_means(rows, best.left_out.cycles))
    load_fixed, load_relative = fixed_and_relative(*hold_means(rows, best.left_out.loads))
    pump = best.left_out.pump
    moving = robust_sd(pump[np.isfinite(pump)])
    untested = 0.0 if temperature_known else UNTESTED_PER_K[kind] * UNTESTED_HALF_RANGE_K / np.sqrt(3.0)
    return (
        RuntimeUncertainty(
            rows=runtime_rows(covariance, fitted.features, fitted.terms.active()),
            fixed=float(np.sqrt(cycle_fixed**2 + load_fixed**2 + DAY_ZERO[kind] ** 2 + (0.3 * untested) ** 2)),
            relative=float(
                np.sqrt(
                    cycle_relative**2 + load_relative**2 + DAY_SPAN[kind] ** 2 + untested**2 + reference_relative**2
                )
            ),
            moving=moving,
            noise=reading.sample_noise,
            noise_interval_s=reading.interval_s,
        ),
        covariance,
    )
