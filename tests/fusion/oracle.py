"""The same model built plainly with filterpy: one KalmanFilter a mode, joined by its IMMEstimator; one leg."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from filterpy.kalman import IMMEstimator, KalmanFilter

from footcal.fusion.model import FusionSettings
from footcal.records import FloatArray

UP = np.array([0.0, 0.0, 1.0])


@dataclass(frozen=True, slots=True)
class Leg:
    """What the model rows of one leg need, as plain arrays."""

    axis_B: FloatArray  # (3,)
    jac_B: FloatArray  # (3, J)
    lag_s: float
    fric_sd_Nm: float
    fric_tau_s: float
    tau_noise_Nm: float
    axial_u_N: float
    axial_noise_N: float


def force_model(
    mode: int, dt_s: float, settings: FusionSettings, weight_N: float
) -> tuple[float, FloatArray, FloatArray]:
    """Return decay, mean and process noise of the force in one mode (DESIGN.md, section 9)."""
    if mode == 0:
        keep = np.exp(-dt_s / settings.swing_tau_s)
        return keep, np.zeros(3), (settings.swing_sd_share * weight_N) ** 2 * (1 - keep**2) * np.eye(3)
    if mode == 1:
        up, side = settings.quiet_walk_up_share_per_sqrt_s, settings.quiet_walk_side_share_per_sqrt_s
        return 1.0, np.zeros(3), dt_s * weight_N**2 * np.diag([side**2, side**2, up**2])
    keep = np.exp(-dt_s / settings.moving_tau_s)
    up, side = settings.moving_up_sd_share, settings.moving_side_sd_share
    spread = (1 - keep**2) * weight_N**2 * np.diag([side**2, side**2, up**2])
    return keep, settings.moving_mean_share * weight_N * UP, spread


def residual_sd_N(leg: Leg, settings: FusionSettings, weight_N: float) -> float:
    """Return the standard deviation of the slow part of the sensor's error."""
    slow = settings.residual_part * (leg.axial_u_N**2 - leg.axial_noise_N**2)
    return float(np.sqrt(slow + (settings.residual_min_share * weight_N) ** 2))


def set_matrices(
    kf: KalmanFilter, mode: int, leg: Leg, tau_in_Nm: FloatArray, dt_s: float, settings: FusionSettings, weight_N: float
) -> None:
    """Write F, B, Q, H, R of one mode."""
    J = leg.jac_B.shape[1]
    n = 4 + 2 * J
    F, Q, B = np.zeros((n, n)), np.zeros((n, n)), np.zeros((n, 1))
    keep, mean, spread = force_model(mode, dt_s, settings, weight_N)
    F[:3, :3], Q[:3, :3], B[:3, 0] = keep * np.eye(3), spread, (1 - keep) * mean
    b, m = slice(3, 3 + J), slice(3 + J, 3 + 2 * J)
    keep_b = np.exp(-dt_s / leg.fric_tau_s)
    F[b, b], Q[b, b] = keep_b * np.eye(J), leg.fric_sd_Nm**2 * (1 - keep_b**2) * np.eye(J)
    a = 1 - np.exp(-dt_s / leg.lag_s)
    F[m, m], F[m, b], F[m, :3], B[m, 0] = (1 - a) * np.eye(J), a * np.eye(J), -a * leg.jac_B.T, a * tau_in_Nm
    keep_e = np.exp(-dt_s / settings.residual_tau_s)
    F[-1, -1], Q[-1, -1] = keep_e, residual_sd_N(leg, settings, weight_N) ** 2 * (1 - keep_e**2)
    H = np.zeros((1 + J, n))
    H[0, :3], H[0, -1], H[1:, m] = leg.axis_B, 1.0, np.eye(J)
    slow = settings.residual_part * (leg.axial_u_N**2 - leg.axial_noise_N**2)
    white = leg.axial_u_N**2 - slow + (settings.reading_min_share * weight_N) ** 2
    kf.F, kf.Q, kf.B, kf.H = F, Q, B, H
    kf.R = np.diag([white] + [leg.tau_noise_Nm**2] * J)


def transition(dt_s: float, settings: FusionSettings) -> FloatArray:
    """Return P_ij, row = from."""
    t = settings
    rates = np.array(
        [
            [0.0, t.swing_to_quiet_per_s, t.swing_to_moving_per_s],
            [t.quiet_to_swing_per_s, 0.0, t.quiet_to_moving_per_s],
            [t.moving_to_swing_per_s, t.moving_to_quiet_per_s, 0.0],
        ]
    )
    M = 1 - np.exp(-rates * dt_s)
    return M + np.diag(1 - M.sum(axis=1))


def kalman_filter(x: FloatArray, P: FloatArray, joints: int) -> KalmanFilter:
    """Return a filterpy filter with one control input (a constant 1 that carries the offsets)."""
    kf = KalmanFilter(dim_x=len(x), dim_z=1 + joints, dim_u=1)
    kf.x, kf.P = x.reshape(-1, 1).copy(), P.copy()
    return kf


def imm(filters: list[KalmanFilter], mu: FloatArray, dt_s: float, settings: FusionSettings) -> IMMEstimator:
    """Return filterpy's estimator over the modes."""
    return IMMEstimator(filters, mu.copy(), transition(dt_s, settings))
