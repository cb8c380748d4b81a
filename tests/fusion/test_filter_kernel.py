"""The compiled filter against plain filterpy, scipy's Riccati solver, and closed forms."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.linalg import solve_discrete_are

from footcal.fusion.model import FusionSettings
from footcal.records import FloatArray
from tests.fusion.lone import LoneFilter, lone_filter
from tests.fusion.oracle import Leg, imm, kalman_filter, set_matrices

WEIGHT_N = 176.58
LINEAR = replace(
    FusionSettings(),
    touchdown_sd_share=0.0,
    lift_reset=0.0,
    stance_cost=0.0,
    mode_floor=0.0,
    torque_timing_s=0.0,
    axial_timing_s=0.0,
)


def leg_of(lone: LoneFilter) -> Leg:
    """Return the filter's leg for the oracle."""
    s = lone.s
    return Leg(
        axis_B=s["axis_B"][:, 0].copy(),
        jac_B=s["jac_B"][:, :, 0].copy(),
        lag_s=0.006,
        fric_sd_Nm=0.2,
        fric_tau_s=0.08,
        tau_noise_Nm=0.15,
        axial_u_N=0.8,
        axial_noise_N=0.3,
    )


def unpacked(lone: LoneFilter, lane: int) -> tuple[FloatArray, FloatArray]:
    """Return state and full covariance of one lane."""
    n = lone.s["fil_x"].shape[0]
    P = np.zeros((n, n))
    P[np.tril_indices(n)] = lone.s["fil_P"][:, lane]
    return lone.s["fil_x"][:, lane].copy(), P + np.tril(P, -1).T


def drive(lone: LoneFilter, rng: np.random.Generator, force_N: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Write one tick of noisy readings of `force_N` (3,); return reading vector (4,) and torque input (3,)."""
    s = lone.s
    tau_in = np.array([0.3, -1.1, 2.0]) + 0.2 * rng.standard_normal(3)
    axial = s["axis_B"][:, 0] @ force_N + 0.5 * rng.standard_normal()
    torque = tau_in - s["jac_B"][:, :, 0].T @ force_N + 0.2 * rng.standard_normal(3)
    s["axial_N"], s["axial_inertia_N"], s["axial_new"] = axial + 1.5, 1.5, 1
    s["tau_rigid_Nm"][:, 0], s["tau_drive_Nm"][:, 0] = tau_in - 0.25, 0.25
    s["tau_meas_Nm"][:, 0], s["tau_new"][:] = torque, 1
    return np.concatenate(([axial], torque)), s["tau_rigid_Nm"][:, 0] + s["tau_drive_Nm"][:, 0]


def gentle_force(k: int) -> FloatArray:
    """A force that all three modes may follow, so that no likelihood underflows in filterpy."""
    swell = 60.0 * np.sin(0.03 * (k - 300)) ** 2 if k > 300 else 0.0
    return np.array([0.4 * np.sin(0.02 * k), 0.2 * np.cos(0.03 * k), 0.9 + 0.9 * np.sin(0.015 * k) + swell])


def test_the_three_mode_filter_equals_filterpys_imm() -> None:
    """With resets, cost and floor switched off by constants, states, covariances and probabilities equal filterpy's."""
    rng = np.random.default_rng(7)
    lone = lone_filter(LINEAR, WEIGHT_N)
    drive(lone, rng, gentle_force(0))
    lone.linear(0)
    leg = leg_of(lone)
    bank = [kalman_filter(*unpacked(lone, mode), 3) for mode in range(3)]
    oracle = imm(bank, lone.s["fil_mu"], 0.001, LINEAR)
    seen = np.zeros(3)
    for k in range(1, 600):
        z, tau_in = drive(lone, rng, gentle_force(k))
        lone.linear(k * 1_000_000)
        for mode, kf in enumerate(bank):
            set_matrices(kf, mode, leg, tau_in, 0.001, LINEAR, WEIGHT_N)
        oracle.predict(np.array([[1.0]]))
        oracle.update(z.reshape(-1, 1))
        seen = np.maximum(seen, lone.s["fil_mu"])
        for mode, kf in enumerate(bank):
            x, P = unpacked(lone, mode)
            assert x == pytest.approx(kf.x[:, 0], abs=1e-9)
            assert pytest.approx(kf.P, abs=1e-9) == P
        assert lone.s["fil_mu"] == pytest.approx(oracle.mu, abs=1e-9)
        assert lone.s["force_B_N"][:, 0] == pytest.approx(oracle.x[:3, 0], abs=1e-9)
        cov = lone.s["fil_cov_N2"][:, 0]
        assert cov == pytest.approx(oracle.P[:3, :3][np.triu_indices(3)], abs=1e-9)
    assert (seen > 0.05).all()  # every mode had its say, else the comparison would be hollow


def test_one_mode_alone_equals_filterpys_kalman_filter() -> None:
    """With no way from mode to mode, each mode is a plain Kalman filter of its own."""
    still = replace(
        LINEAR,
        swing_to_quiet_per_s=0.0,
        swing_to_moving_per_s=0.0,
        quiet_to_swing_per_s=0.0,
        quiet_to_moving_per_s=0.0,
        moving_to_swing_per_s=0.0,
        moving_to_quiet_per_s=0.0,
    )
    rng = np.random.default_rng(8)
    lone = lone_filter(still, WEIGHT_N)
    drive(lone, rng, gentle_force(0))
    lone.linear(0)
    leg = leg_of(lone)
    kf = kalman_filter(*unpacked(lone, 2), 3)
    for k in range(1, 400):
        z, tau_in = drive(lone, rng, gentle_force(k))
        lone.linear(k * 2_000_000)
        set_matrices(kf, 2, leg, tau_in, 0.002, still, WEIGHT_N)
        kf.predict(np.array([[1.0]]))
        kf.update(z.reshape(-1, 1))
    x, P = unpacked(lone, 2)
    assert x == pytest.approx(kf.x[:, 0], abs=1e-9)
    assert pytest.approx(kf.P, abs=1e-9) == P


def test_the_settled_covariance_solves_the_riccati_equation() -> None:
    """After long enough the moving mode's prior covariance is the solution of scipy's discrete Riccati solver."""
    still = replace(
        LINEAR,
        moving_to_swing_per_s=0.0,
        moving_to_quiet_per_s=0.0,
        swing_to_moving_per_s=0.0,
        quiet_to_moving_per_s=0.0,
    )
    rng = np.random.default_rng(9)
    lone = lone_filter(still, WEIGHT_N)
    for k in range(4000):
        drive(lone, rng, np.array([0.0, 0.0, 40.0]))
        lone.linear(k * 1_000_000)
    kf = kalman_filter(*unpacked(lone, 2), 3)
    set_matrices(kf, 2, leg_of(lone), np.zeros(3), 0.001, still, WEIGHT_N)
    prior = solve_discrete_are(kf.F.T, kf.H.T, kf.Q, kf.R)
    gain = prior @ kf.H.T @ np.linalg.inv(kf.H @ prior @ kf.H.T + kf.R)
    posterior = prior - gain @ kf.H @ prior
    assert unpacked(lone, 2)[1] == pytest.approx(posterior, abs=1e-8)  # the solver itself is good to some 1e-9 here


@pytest.mark.parametrize(
    ("q", "r", "gain", "posterior"),
    # Random walk in noise, closed form K = P-/(P- + r), P- = (q + sqrt(q^2 + 4 q r))/2; values computed outside by hand
    # and by scipy's Riccati solver. q = r = 1 is the golden ratio.
    [
        (1.0, 1.0, 0.61803398875, 0.61803398875),
        (1.0e-4, 1.0e-2, 0.0951249219725, 0.000951249219725),
        (4.0, 0.25, 0.944271909999, 0.2360679775),
        (1.0e-6, 1.0, 0.000999500125, 0.000999500125),
    ],
)
def test_a_vertical_random_walk_has_the_closed_form_gain(q: float, r: float, gain: float, posterior: float) -> None:
    """Quiet stance with a vertical sensor alone is the textbook random walk: gain and variance as the closed form."""
    settings = replace(
        LINEAR,
        quiet_to_swing_per_s=0.0,
        quiet_to_moving_per_s=0.0,
        swing_to_quiet_per_s=0.0,
        moving_to_quiet_per_s=0.0,
        quiet_walk_up_share_per_sqrt_s=float(np.sqrt(q / 0.001)),
        quiet_walk_side_share_per_sqrt_s=0.0,
        moving_up_sd_share=10.0,
        moving_side_sd_share=0.0,
        residual_part=0.0,
        residual_min_share=0.0,
        reading_min_share=0.0,
    )
    lone = lone_filter(settings, weight_N=1.0)
    s = lone.s
    s["axis_B"][:, 0] = 0.0, 0.0, 1.0
    s["axial_u_N"], s["axial_new"], s["tau_new"] = np.sqrt(r), 1, 0
    steps = 20_000 if q / r < 1e-5 else 2_000
    for k in range(steps):
        s["axial_N"] = 1.0
        lone.linear(k * 1_000_000)
    before = s["fil_x"][2, 1]
    s["axial_N"] = before + 1.0
    lone.linear(steps * 1_000_000)
    assert s["fil_x"][2, 1] - before == pytest.approx(gain, rel=1e-9)
    assert unpacked(lone, 1)[1][2, 2] == pytest.approx(posterior, rel=1e-9)
