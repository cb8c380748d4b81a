"""One tick of everything, the one way from raw input to estimate: `step`; live and replay both go through it."""

from __future__ import annotations

from typing import Any

from numba import njit

from footcal.fusion.decide import decide
from footcal.fusion.filter_kernel import predict, update
from footcal.fusion.health import STALE, judge, watch
from footcal.fusion.model_rows import fresh_filter, model_rows, readings, upright
from footcal.leg.step import leg_step
from footcal.sensor.kernel import sensor_step

RESET_GAP_NS = 50_000_000


@njit(error_model="numpy")
def take_time(t_ns: int, s: Any) -> bool:
    """Set dt and reset; False for a tick that is not after the last one (dropped and counted)."""
    if s.fil_started[0] == 0:
        s.fil_started[0] = 1
        s.t_ns[0] = t_ns
        s.dt_s[0] = 0.0
        s.reset[0] = 1
        return True
    dt_ns = t_ns - s.t_ns[0]
    if dt_ns <= 0:
        s.fil_dropped[0] += 1
        return False
    s.t_ns[0] = t_ns
    s.dt_s[0] = dt_ns * 1e-9
    s.reset[0] = 1 if dt_ns > RESET_GAP_NS else 0
    return True


@njit(error_model="numpy", inline="always")
def filter_step(s: Any, c: Any) -> None:
    """Predict and update all filters of all legs by the readings that `readings` (and health) left usable."""
    if s.reset[0] == 1:
        fresh_filter(s, c)
        for l in range(s.axial_N.shape[0]):
            s.fil_decided[l] = 0
            s.fil_pending[l] = 0
        s.fil_resets[0] += 1
    model_rows(s, c)
    if s.reset[0] == 0:
        predict(s, c)
    update(s, c)


@njit(error_model="numpy", inline="always")
def fuse(inp: Any, s: Any, c: Any) -> None:
    """From shared sensor and leg fields to contact and force: trust, filter, observe, decide."""
    readings(s, c)
    watch(inp, s, c)
    filter_step(s, c)
    judge(s, c)
    decide(s, c)


@njit(error_model="numpy")
def emit(s: Any, out: Any) -> None:
    """Copy the estimate of all legs from the state into the output record."""
    legs = s.axial_N.shape[0]
    out.t_ns = s.t_ns[0]
    for l in range(legs):
        out.p_contact[l] = 1.0 - s.fil_mu[l]
        out.contact[l] = s.fil_contact[l]
        out.contact_known[l] = s.fil_known[l]
        out.event[l] = s.fil_event[l]
        out.t_event_s[l] = s.fil_t_event_s[l]
        out.axial_N[l] = s.axial_N[l]
        out.axial_u_N[l] = s.axial_u_N[l]
        out.sensor_bias_N[l] = s.fil_zero_N[l]
        out.foot_age_s[l] = s.axial_age_s[l]
        out.motor_age_s[l] = s.motor_age_s[l]
        out.health[l] = s.fil_health[l]
        out.nis[l] = s.fil_nis[l]
        out.nis_dof[l] = s.fil_nis_dof[l]
        for i in range(3):
            out.force_B_N[i, l] = s.force_B_N[i, l]
            out.mode_p[i, l] = s.fil_mu[i * legs + l]
        for i in range(6):
            out.cov_B_N2[i, l] = s.fil_cov_N2[i, l]


@njit(error_model="numpy")
def repeat(s: Any, out: Any) -> None:
    """Write the last estimate once more, marked stale and without event."""
    emit(s, out)
    for l in range(s.axial_N.shape[0]):
        out.event[l] = 0
        out.t_event_s[l] = float("nan")
        out.health[l] |= STALE


@njit(error_model="numpy", inline="always")
def step(inp: Any, gravity: Any, s: Any, c: Any, out: Any) -> None:
    """One tick of the whole robot.

    Args:
        inp: input record (`tick_dtype`); NaN means no new reading.
        gravity: shape (3,), m/s2, body frame of a level robot; used while the inertial unit gives nothing.
        s: state record; the only thing changed besides `out`.
        c: constants record.
        out: output record (`out_dtype`).
    """
    if not take_time(inp.t_ns, s):
        repeat(s, out)
        return
    upright(inp, gravity, s)
    sensor_step(inp, s, c)
    leg_step(inp, gravity, s, c)
    fuse(inp, s, c)
    emit(s, out)
