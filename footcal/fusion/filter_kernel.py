"""How the fusion reasons: an interacting-multiple-model Kalman filter (Blom and Bar-Shalom 1988) for all legs at once.

State of one filter: force F (3, body frame), friction error b and low-passed motor torque m (one a joint), residual of
the foot sensor e. Lanes are mode * legs + leg. Covariances are packed lower triangles; readings are taken in one after
another as scalars, which on one stored triangle keeps the covariance symmetric by construction.
"""

from __future__ import annotations

from typing import Any

from numba import njit
from numpy import exp, sqrt

from footcal.fusion.mixing import (
    go_round,
    mix_after_next,
    mix_near,
    mix_next,
    mix_own,
    mix_states,
    open_and_reset,
    weights,
)


@njit(error_model="numpy")
def tri(i: int, j: int) -> int:
    """Index of row i, column j (either order) in a packed lower triangle."""
    if i >= j:
        return i * (i + 1) // 2 + j
    return j * (j + 1) // 2 + i


@njit(error_model="numpy")
def _predict_states(s: Any) -> None:
    """Means over one tick: F, e and b decay towards their means, m follows its right-hand side with the drive's lag."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    joints = s.tau_new.shape[0]
    x, old = s.fil_x, s.fil_mixed_x
    for f in range(lanes):
        for k in range(joints):
            pull = s.fil_jac[0, k, f] * old[0, f] + s.fil_jac[1, k, f] * old[1, f] + s.fil_jac[2, k, f] * old[2, f]
            m = old[3 + joints + k, f]
            x[3 + joints + k, f] = m + s.fil_lag[k, f] * (s.fil_tau_in[k, f] - pull + old[3 + k, f] - m)
            x[3 + k, f] = s.fil_fric_keep[k, f] * old[3 + k, f]
        for i in range(3):
            x[i, f] = s.fil_force_keep[f] * old[i, f] + s.fil_force_in[i, f]
        x[n - 1, f] = s.fil_e_keep[f] * old[n - 1, f]


@njit(error_model="numpy")
def _predict_torque_rows(s: Any) -> None:
    """fil_cross[k] = covariance of the new m_k with every old state."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    joints = s.tau_new.shape[0]
    P, cross = s.fil_mixed_P, s.fil_cross
    for f in range(lanes):
        for k in range(joints):
            a = s.fil_lag[k, f]
            j0, j1, j2 = s.fil_jac[0, k, f], s.fil_jac[1, k, f], s.fil_jac[2, k, f]
            for i in range(n):
                pull = j0 * P[tri(i, 0), f] + j1 * P[tri(i, 1), f] + j2 * P[tri(i, 2), f]
                cross[k, i, f] = (1.0 - a) * P[tri(i, 3 + joints + k), f] + a * (P[tri(i, 3 + k), f] - pull)


@njit(error_model="numpy")
def _keep_of(i: int, f: int, s: Any) -> Any:
    """Decay factor of a state that is not a motor torque."""
    joints = s.tau_new.shape[0]
    if i < 3:
        return s.fil_force_keep[f]
    if i < 3 + joints:
        return s.fil_fric_keep[i - 3, f]
    return s.fil_e_keep[f]


@njit(error_model="numpy")
def _predict_covariances(s: Any) -> None:
    """P = A P A' + Q, row by row; the torque rows come from `fil_cross`."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    joints = s.tau_new.shape[0]
    old, P, cross = s.fil_mixed_P, s.fil_P, s.fil_cross
    first = 3 + joints
    for f in range(lanes):
        for i in range(n):
            for j in range(n):
                if j <= i:
                    p = i * (i + 1) // 2 + j
                    i_is_m = first <= i < first + joints
                    j_is_m = first <= j < first + joints
                    if i_is_m and j_is_m:
                        k, l = i - first, j - first
                        pull = (
                            s.fil_jac[0, l, f] * cross[k, 0, f]
                            + s.fil_jac[1, l, f] * cross[k, 1, f]
                            + s.fil_jac[2, l, f] * cross[k, 2, f]
                        )
                        a = s.fil_lag[l, f]
                        P[p, f] = (1.0 - a) * cross[k, j, f] + a * (cross[k, 3 + l, f] - pull)
                    elif i_is_m:
                        P[p, f] = cross[i - first, j, f] * _keep_of(j, f, s)
                    elif j_is_m:
                        P[p, f] = cross[j - first, i, f] * _keep_of(i, f, s)
                    else:
                        P[p, f] = old[p, f] * _keep_of(i, f, s) * _keep_of(j, f, s)
        for p in range(6):
            P[p, f] += s.fil_force_q[p, f]
        for k in range(joints):
            P[(3 + k) * (4 + k) // 2 + 3 + k, f] += s.fil_fric_q[k, f]
            m = first + k
            P[m * (m + 1) // 2 + m, f] += s.fil_tau_q[k, f]
        P[n * (n + 1) // 2 - 1, f] += s.fil_e_q[f]


@njit(error_model="numpy")
def _take_axial(s: Any) -> None:
    """Take in the foot reading: z = h F + e + white noise."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    P, x, v = s.fil_P, s.fil_x, s.fil_v
    for f in range(lanes):
        h0, h1, h2 = s.fil_h[0, f], s.fil_h[1, f], s.fil_h[2, f]
        for i in range(n):
            v[i, f] = h0 * P[tri(i, 0), f] + h1 * P[tri(i, 1), f] + h2 * P[tri(i, 2), f] + P[tri(n - 1, i), f]
        spread = h0 * v[0, f] + h1 * v[1, f] + h2 * v[2, f] + v[n - 1, f] + s.fil_r_axial[f]
        y = s.fil_z_axial[f] - (h0 * x[0, f] + h1 * x[1, f] + h2 * x[2, f] + x[n - 1, f])
        w = 1.0 / spread
        s.fil_quad[f] = y * y * w
        s.fil_det[f] = spread
        for i in range(n):
            g = v[i, f] * w
            x[i, f] += g * y
            for j in range(n):
                if j <= i:
                    P[i * (i + 1) // 2 + j, f] -= g * v[j, f]


@njit(error_model="numpy")
def _take_torque(s: Any, k: int) -> None:
    """Take in the torque of motor k: z = m_k + white noise."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    row = 3 + s.tau_new.shape[0] + k
    P, x, v = s.fil_P, s.fil_x, s.fil_v
    for f in range(lanes):
        for i in range(n):
            v[i, f] = P[tri(i, row), f]
        spread = v[row, f] + s.fil_r_tau[k, f]
        y = s.fil_z_tau[k, f] - x[row, f]
        w = 1.0 / spread
        s.fil_quad[f] += y * y * w
        s.fil_det[f] *= spread
        for i in range(n):
            g = v[i, f] * w
            x[i, f] += g * y
            for j in range(n):
                if j <= i:
                    P[i * (i + 1) // 2 + j, f] -= g * v[j, f]


@njit(error_model="numpy")
def _stance_costs(s: Any, c: Any) -> None:
    """Add to both stance modes what a stance with hardly any vertical force costs (as twice a log likelihood)."""
    legs = s.axial_N.shape[0]
    up = s.fil_up_B
    x = s.fil_x
    weight = 0.0 if s.reset[0] == 1 else 2.0 * s.dt_s[0] * c.fil_cost_per_s[0]
    for l in range(legs):
        f0 = c.fil_cost_N[0] + c.sen_unload_share[l] * s.fil_peak_N[l]
        for mode in range(1, 3):
            f = mode * legs + l
            lack = (f0 - (up[0] * x[0, f] + up[1] * x[1, f] + up[2] * x[2, f])) / f0
            lack = min(max(lack, 0.0), c.fil_cost_cap[0])
            s.fil_quad[f] += weight * lack * lack


@njit(error_model="numpy")
def _mode_probabilities(s: Any, c: Any) -> None:
    """Posterior of the modes; the smallest distance is taken out first so that no likelihood underflows."""
    legs = s.axial_N.shape[0]
    mu, quad, det, cbar = s.fil_mu, s.fil_quad, s.fil_det, s.fil_cbar
    floor = c.fil_floor[0]
    for l in range(legs):
        least = min(quad[l], quad[legs + l], quad[2 * legs + l])
        for mode in range(3):
            f = mode * legs + l
            mu[f] = cbar[f] * exp(-0.5 * (quad[f] - least))
    for l in range(legs):
        unit = det[l]
        p0 = mu[l]
        p1 = mu[legs + l] * sqrt(unit / det[legs + l])
        p2 = mu[2 * legs + l] * sqrt(unit / det[2 * legs + l])
        whole = 1.0 / (p0 + p1 + p2)
        p0, p1, p2 = max(p0 * whole, floor), max(p1 * whole, floor), max(p2 * whole, floor)
        whole = 1.0 / (p0 + p1 + p2)
        mu[l], mu[legs + l], mu[2 * legs + l] = p0 * whole, p1 * whole, p2 * whole


@njit(error_model="numpy")
def _combine(s: Any) -> None:
    """Force of each leg over all modes: mean, and covariance with the spread between the modes."""
    legs = s.axial_N.shape[0]
    x, P, mu, force = s.fil_x, s.fil_P, s.fil_mu, s.force_B_N
    for l in range(legs):
        w0, w1, w2 = mu[l], mu[legs + l], mu[2 * legs + l]
        for i in range(3):
            force[i, l] = w0 * x[i, l] + w1 * x[i, legs + l] + w2 * x[i, 2 * legs + l]
        out = 0
        for j in range(3):
            for i in range(3):
                if i >= j:
                    p = i * (i + 1) // 2 + j
                    total = 0.0
                    for mode in range(3):
                        f = mode * legs + l
                        total += mu[f] * (P[p, f] + (x[i, f] - force[i, l]) * (x[j, f] - force[j, l]))
                    s.fil_cov_N2[out, l] = total
                    out += 1


@njit(error_model="numpy", inline="always")
def predict(s: Any, c: Any) -> None:
    """Mix the modes and carry every filter over `dt_s`; the model rows are those `model_rows` has written."""
    weights(s, c)
    go_round(s)
    mix_states(s, c)
    mix_own(s)
    mix_near(s)
    mix_next(s)
    mix_after_next(s)
    open_and_reset(s, c)
    _predict_states(s)
    _predict_torque_rows(s)
    _predict_covariances(s)


@njit(error_model="numpy", inline="always")
def update(s: Any, c: Any) -> None:
    """Take in the foot reading and the motor torques, then weigh the modes and combine them."""
    joints = s.tau_new.shape[0]
    _take_axial(s)
    _take_torque(s, 0)
    _take_torque(s, 1)
    _take_torque(s, 2)
    if joints > 3:
        _take_torque(s, 3)
        _take_torque(s, 4)
        _take_torque(s, 5)
    legs = s.axial_N.shape[0]
    for l in range(legs):
        s.fil_nis[l] = (
            s.fil_mu[l] * s.fil_quad[l]
            + s.fil_mu[legs + l] * s.fil_quad[legs + l]
            + s.fil_mu[2 * legs + l] * s.fil_quad[2 * legs + l]
        )
    _stance_costs(s, c)
    _mode_probabilities(s, c)
    _combine(s)
