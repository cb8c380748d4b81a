"""The fit for one choice of terms: the curve, then three passes that undo creep before they look at the loop."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.fit.channel import Channel
from footcal.fit.features import mean_features
from footcal.fit.least_squares import solve
from footcal.fit.priors import prior_rows
from footcal.fit.robust import huber_weights, row_scales
from footcal.fit.rows import Rows
from footcal.fit.terms import Terms
from footcal.records import BoolArray, FloatArray
from footcal.sensor.curve import N_POWERS, power_columns
from footcal.sensor.model import CREEPS, N_FEATURES
from footcal.sensor.temperature import N_TEMPERATURE, temperature_columns
from footcal.sensor.transform import normalised

PASSES: Final = 3
HUBER_ROUNDS: Final = 4
SLOW_CREEP_FROM: Final = 4  # first creep state with a time constant of 2 s or more
SCALE_FLOOR: Final = 1e-6  # of full scale


@dataclass(frozen=True, slots=True)
class Reading:
    """The foot's signal before the model: ratio u and scaled temperature at every sample."""

    ratio: FloatArray  # (n,) u
    theta: FloatArray  # (n,) 0 where there is no thermometer
    u_zero: float
    u_span: float
    noise: float  # smallest scale a residual can have, share of full scale
    sample_noise: float  # standard deviation of one sample, share of full scale
    interval_s: float  # usual sample interval


@dataclass(frozen=True, slots=True)
class Fitted:
    """One fit: coefficients, and everything later steps need of how it came about."""

    terms: Terms
    curve: FloatArray  # (6,)
    curve_temperature: FloatArray  # (5,)
    creep_undone: FloatArray  # (8,)
    coefficients: FloatArray  # (32,)
    features: FloatArray  # (rows, 32)
    residual: FloatArray  # (rows,) target - prediction
    huber: FloatArray  # (rows,)
    scale: FloatArray  # (rows,) robust scale of each row, share of full scale
    creep_rms: float
    apparent: FloatArray  # (n,) v at every sample

    @property
    def row_weight(self) -> FloatArray:
        """Huber weight over squared scale, shape (rows,); base weights come on top."""
        return self.huber / self.scale**2


def fit_terms(channel: Channel, reading: Reading, rows: Rows, terms: Terms) -> Fitted:
    """Return the fit of the chosen terms to the rows.

    Raises:
        FitRefusedError: the rows can't tell the coefficients apart.
    """
    x = normalised(reading.ratio, u_zero=reading.u_zero, u_span=reading.u_span, gamma=terms.gamma)
    curve, curve_temperature = _fit_curve(x, reading.theta, rows, terms)
    apparent = power_columns(x) @ curve + temperature_columns(reading.theta, x) @ curve_temperature
    undone = np.zeros(CREEPS.stop - CREEPS.start)
    creep_rms = 0.0
    if terms.creep:
        features = mean_features(channel.t_ns, apparent, reading.theta, undone, rows.start, rows.stop)
        slow_only = terms.active()
        slow_only[CREEPS.start : CREEPS.start + SLOW_CREEP_FROM] = False
        first = _solve_robust(features, rows, slow_only, 0.1, reading.noise)[0]
        creep_rms = float(np.sqrt(np.mean(first[CREEPS.start + SLOW_CREEP_FROM : CREEPS.stop] ** 2)))
    for step in range(PASSES):
        features = mean_features(channel.t_ns, apparent, reading.theta, undone, rows.start, rows.stop)
        coefficients, huber, scale = _solve_robust(features, rows, terms.active(), creep_rms, reading.noise)
        if step + 1 < PASSES:
            undone = coefficients[CREEPS].copy()
    return Fitted(
        terms=terms,
        curve=curve,
        curve_temperature=curve_temperature,
        creep_undone=undone,
        coefficients=coefficients,
        features=features,
        residual=rows.target - features @ coefficients,
        huber=huber,
        scale=scale,
        creep_rms=creep_rms,
        apparent=apparent,
    )


def _fit_curve(x: FloatArray, theta: FloatArray, rows: Rows, terms: Terms) -> tuple[FloatArray, FloatArray]:
    """Fit the apparent force on the holds alone: a plain curve with temperature, lightly held by priors."""
    holds = ~rows.pump
    x_mean, theta_mean = _row_means(x, rows)[holds], _row_means(theta, rows)[holds]
    active_powers = np.arange(N_POWERS) <= terms.degree
    columns = np.column_stack([power_columns(x_mean), temperature_columns(theta_mean, x_mean)])
    active = np.concatenate([active_powers, terms.temperature_active()])
    prior = np.eye(int(active.sum())) * 1e-3  # a hundredth of a typical residual over the prior's 10
    target = np.concatenate([rows.target[holds], np.zeros(len(prior))])
    weight = np.sqrt(rows.weight[holds])
    huber = np.ones(len(weight))
    for _ in range(HUBER_ROUNDS):
        root = weight * np.sqrt(huber)
        found = solve(
            np.vstack([columns[:, active] * root[:, None], prior]),
            np.concatenate([rows.target[holds] * root, target[len(root) :]]),
        ).coefficients
        residual = rows.target[holds] - columns[:, active] @ found
        scale = row_scales(residual, rows.hold[holds], SCALE_FLOOR)
        huber = huber_weights(residual / scale)
    full = np.zeros(N_POWERS + N_TEMPERATURE)
    full[active] = found
    return full[:N_POWERS], full[N_POWERS:]


def _row_means(values: FloatArray, rows: Rows) -> FloatArray:
    sums = np.concatenate([[0.0], np.cumsum(values)])
    return np.asarray((sums[rows.stop] - sums[rows.start]) / (rows.stop - rows.start))


def _solve_robust(
    features: FloatArray, rows: Rows, active: BoolArray, creep_rms: float, noise: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Huber-weighted least squares with priors; returns coefficients (32,), Huber weights and row scales."""
    columns = features[:, active]
    prior = prior_rows(active, creep_rms)
    zeros = np.zeros(len(prior))
    floor = max(noise, SCALE_FLOOR)
    huber, scale = np.ones(len(columns)), np.full(len(columns), 1e-3)
    found = np.zeros(columns.shape[1])
    for _ in range(HUBER_ROUNDS):
        root = np.sqrt(rows.weight * huber) / scale
        found = solve(
            np.vstack([columns * root[:, None], prior]), np.concatenate([rows.target * root, zeros])
        ).coefficients
        residual = rows.target - columns @ found
        scale = row_scales(residual, rows.hold, floor)
        huber = huber_weights(residual / scale)
    coefficients = np.zeros(N_FEATURES)
    coefficients[active] = found
    return coefficients, huber, scale
