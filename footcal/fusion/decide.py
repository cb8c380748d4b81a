"""From mode probabilities to a decided contact: Schmitt trigger with confirmation, and times between the samples."""

from __future__ import annotations

from typing import Any

from numba import njit
from numpy import sqrt

from footcal.fusion.health import SATURATED, STUCK, UNCALIBRATED
from footcal.fusion.model_rows import OFF


@njit(error_model="numpy")
def _crossing_ns(p: float, p_before: float, level: float, s: Any) -> Any:
    """When p went through `level`, by a straight line between the last two samples; this sample where it did not."""
    late = 0.0
    if (p - level) * (p_before - level) < 0.0:
        late = (p - level) / (p - p_before)
    return s.t_ns[0] - int(late * s.dt_s[0] * 1e9)


@njit(error_model="numpy")
def _known(l: int, s: Any, c: Any) -> bool:
    """Tell whether foot or torque can decide at all: a usable foot, or motors that see the vertical force well."""
    sick = s.fil_health[l] & (STUCK | SATURATED | UNCALIBRATED)
    if not sick and s.fil_mute_s[l] <= c.fil_stale_s[0] + 2.0 * c.fil_period_s[l]:
        return True
    up = s.fil_up_B
    seen = 0.0  # 1/N^2
    for k in range(s.tau_new.shape[0]):
        arm_m = s.jac_B[0, k, l] * up[0] + s.jac_B[1, k, l] * up[1] + s.jac_B[2, k, l] * up[2]
        spread = s.fric_sd_Nm[k, l] ** 2 + s.fil_tau_Nm2[k, l]
        if s.fil_tau_Nm2[k, l] < OFF and spread > 0.0:
            seen += arm_m * arm_m / spread
    return seen > 0.0 and 1.0 / sqrt(seen) < c.fil_known_N[0]


@njit(error_model="numpy")
def _settle(contact: int, began_ns: int, l: int, s: Any) -> None:
    """Take the new contact state; the first one after a start is no event."""
    if s.fil_decided[l] == 1:
        s.fil_event[l] = 1 if contact == 1 else -1
        s.fil_t_event_s[l] = began_ns * 1e-9
    if contact == 1:
        s.fil_touch_ns[l] = began_ns
    s.fil_contact[l] = contact
    s.fil_decided[l] = 1
    s.fil_pending[l] = 0


@njit(error_model="numpy")
def decide(s: Any, c: Any) -> None:
    """Decide contact of every leg; an event tells the time at which the change began, not when it was confirmed."""
    legs = s.axial_N.shape[0]
    up = s.fil_up_B
    t_ns = s.t_ns[0]
    for l in range(legs):
        p = 1.0 - s.fil_mu[l]
        lift_N = up[0] * s.force_B_N[0, l] + up[1] * s.force_B_N[1, l] + up[2] * s.force_B_N[2, l]
        s.fil_event[l] = 0
        s.fil_t_event_s[l] = float("nan")
        on = p > c.fil_on_p[0] and lift_N > c.fil_min_N[0]
        off = p < c.fil_off_p[0]
        undecided = s.fil_decided[l] == 0
        turning = (on and (undecided or s.fil_contact[l] == 0)) or (off and (undecided or s.fil_contact[l] == 1))
        level = c.fil_on_p[0] if on else c.fil_off_p[0]
        if not turning:
            s.fil_pending[l] = 0
        elif s.fil_pending[l] == 0:
            s.fil_pending[l] = 1
            s.fil_pending_ns[l] = _crossing_ns(p, s.fil_p[l], level, s)
        if s.fil_pending[l] == 1:
            wait_s = c.fil_on_s[0] if on else c.fil_off_s[0]
            if not on and (t_ns - s.fil_touch_ns[l]) * 1e-9 < c.fil_early_s[0]:
                wait_s = c.fil_early_off_s[0]
            if (t_ns - s.fil_pending_ns[l]) * 1e-9 >= wait_s - 1e-9:
                _settle(1 if on else 0, s.fil_pending_ns[l], l, s)
        if s.fil_decided[l] == 0:
            s.fil_contact[l] = 1 if p > 0.5 else 0
        s.fil_p[l] = p
        s.fil_known[l] = 1 if s.fil_decided[l] == 1 and _known(l, s, c) else 0
