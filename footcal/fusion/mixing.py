"""Mixing of the three modes before each prediction (Blom and Bar-Shalom 1988), with resets at touchdown and lift-off.

A reset is a mixing component of its own: what enters swing from a stance comes with force, friction error and residual
at their priors; what enters a stance from swing comes with an open force.
"""

from __future__ import annotations

from typing import Any

from numba import njit
from numpy import exp, sqrt


@njit(error_model="numpy")
def weights(s: Any, c: Any) -> None:
    """Mode transition over one tick, P_ij = 1 - exp(-rate_ij dt), and the mixing weights of every lane.

    Row r of a weight belongs to the source lane r * legs further on (turning round), so that sources lie side by side.
    """
    dt = s.dt_s[0]
    trans = s.fil_trans
    for i in range(3):
        stay = 1.0
        for j in range(3):
            if i != j:
                trans[i, j] = 1.0 - exp(-c.fil_rate_per_s[i, j] * dt)
                stay -= trans[i, j]
        trans[i, i] = stay
    legs = s.axial_N.shape[0]
    mu, cbar, omega = s.fil_mu, s.fil_cbar, s.fil_omega
    for j in range(3):
        for l in range(legs):
            f = j * legs + l
            total = 0.0
            for i in range(3):
                total += mu[i * legs + l] * trans[i, j]
            cbar[f] = total
            for turn in range(3):
                i = (j + turn) % 3
                omega[turn, f] = mu[i * legs + l] * trans[i, j] / total
                if not total > 0.0:  # a mode that nothing leads to stays itself, unmixed
                    omega[turn, f] = 1.0 if turn == 0 else 0.0


@njit(error_model="numpy")
def go_round(s: Any) -> None:
    """Repeat the lanes of the first two modes behind the last, so that lane f + r * legs never runs out."""
    legs = s.axial_N.shape[0]
    x, P = s.fil_x, s.fil_P
    for f in range(2 * legs):
        for i in range(x.shape[0]):
            x[i, 3 * legs + f] = x[i, f]
        for p in range(P.shape[0]):
            P[p, 3 * legs + f] = P[p, f]


@njit(error_model="numpy")
def mix_states(s: Any, c: Any) -> None:
    """Mix the means; what enters swing from a stance has force, friction error and residual at their priors (zero).

    The spread of three means about their mixture is written as two vectors: the second and third joined first, then the
    first with both, spread = near near' + far far'.
    """
    legs = s.axial_N.shape[0]
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    x, mixed, omega, keep = s.fil_x, s.fil_mixed_x, s.fil_omega, c.fil_mix_keep
    for f in range(lanes):
        w0, w1, w2 = omega[0, f], omega[1, f], omega[2, f]
        other = max(w1 + w2, 1e-300)
        near = sqrt(w1 / other * w2)
        far = sqrt(w0 * (w1 + w2))
        root1, root2 = sqrt(w1), sqrt(w2)
        for i in range(n):
            x0, x1, x2 = x[i, f], keep[0, i, f] * x[i, f + legs], keep[1, i, f] * x[i, f + 2 * legs]
            joined = (w1 * x1 + w2 * x2) / other
            mixed[i, f] = w0 * x0 + (w1 * x1 + w2 * x2)
            s.fil_near[i, f] = near * (x1 - x2)
            s.fil_far[i, f] = far * (x0 - joined)
            s.fil_root[0, i, f] = root1 * keep[0, i, f]
            s.fil_root[1, i, f] = root2 * keep[1, i, f]


@njit(error_model="numpy")
def mix_own(s: Any) -> None:
    """Begin the mixed covariances: what each mode had itself, and the far spread."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    half = n // 2  # two short loops: the compiler unrolls, and so vectorises, only bodies up to some size
    P, mixed_P, far = s.fil_P, s.fil_mixed_P, s.fil_far
    for f in range(lanes):
        w = s.fil_omega[0, f]
        for i in range(half):
            for j in range(half):
                if j <= i:
                    p = i * (i + 1) // 2 + j
                    mixed_P[p, f] = w * P[p, f] + far[i, f] * far[j, f]
        for i in range(half, n):
            for j in range(n):
                if j <= i:
                    p = i * (i + 1) // 2 + j
                    mixed_P[p, f] = w * P[p, f] + far[i, f] * far[j, f]


@njit(error_model="numpy")
def mix_near(s: Any) -> None:
    """Add the near spread."""
    lanes = s.fil_mu.shape[0]
    n = s.fil_x.shape[0]
    mixed_P, near = s.fil_mixed_P, s.fil_near
    for f in range(lanes):
        for i in range(n):
            for j in range(n):
                if j <= i:
                    mixed_P[i * (i + 1) // 2 + j, f] += near[i, f] * near[j, f]


def _make_mix(turn: int) -> Any:  # noqa: C901 (one loop, cut in three for the compiler)
    """Return the step that adds the covariance of the mode `turn` places on; a literal, so that rows cannot overlap."""

    @njit(error_model="numpy")
    def mix(s: Any) -> None:  # noqa: C901
        lanes = s.fil_mu.shape[0]
        shift = turn * s.axial_N.shape[0]
        n = s.fil_x.shape[0]
        half, most = n // 2, 3 * n // 4
        P, mixed_P, root = s.fil_P, s.fil_mixed_P, s.fil_root
        for f in range(lanes):
            for i in range(half):  # three short loops, see mix_own
                for j in range(half):
                    if j <= i:
                        p = i * (i + 1) // 2 + j
                        mixed_P[p, f] += root[turn - 1, i, f] * root[turn - 1, j, f] * P[p, f + shift]
            for i in range(half, most):
                for j in range(most):
                    if j <= i:
                        p = i * (i + 1) // 2 + j
                        mixed_P[p, f] += root[turn - 1, i, f] * root[turn - 1, j, f] * P[p, f + shift]
            for i in range(most, n):
                for j in range(n):
                    if j <= i:
                        p = i * (i + 1) // 2 + j
                        mixed_P[p, f] += root[turn - 1, i, f] * root[turn - 1, j, f] * P[p, f + shift]

    return mix


mix_next = _make_mix(1)
mix_after_next = _make_mix(2)


@njit(error_model="numpy")
def open_and_reset(s: Any, c: Any) -> None:
    """What a change of mode adds: the priors' variance on entering swing, an open force on touchdown."""
    legs = s.axial_N.shape[0]
    n = s.fil_x.shape[0]
    joints = s.tau_new.shape[0]
    mixed_P, omega, up = s.fil_mixed_P, s.fil_omega, s.fil_up_B
    for l in range(legs):
        fresh = c.fil_lift_reset[0] * (omega[1, l] + omega[2, l])
        opened1, opened2 = omega[2, legs + l], omega[1, 2 * legs + l]  # from swing into quiet, into moving
        mixed_P[n * (n + 1) // 2 - 1, l] += fresh * s.fil_e_sd_N[l] ** 2
        for k in range(joints):
            mixed_P[(3 + k) * (4 + k) // 2 + 3 + k, l] += fresh * s.fric_sd_Nm[k, l] ** 2
        for i in range(3):
            mixed_P[i * (i + 1) // 2 + i, l] += fresh * c.fil_swing_sd_N[0] ** 2
            for j in range(i + 1):
                spread = c.fil_touch_up_N2[0] * up[i] * up[j] + (c.fil_touch_all_N2[0] if i == j else 0.0)
                mixed_P[i * (i + 1) // 2 + j, legs + l] += opened1 * spread
                mixed_P[i * (i + 1) // 2 + j, 2 * legs + l] += opened2 * spread
