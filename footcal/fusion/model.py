"""What the fusion believes: its settings, shares of the robot's weight and rates per second, and constants from them.

Shares are of the weight W of the whole robot, rates are per second, so that one table serves any robot and any sample
rate. The starting values are from a prototype (DESIGN.md §9); each may be set in the `[fusion]` table of robot.toml.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, fields, replace

import numpy as np

from footcal.errors import SettingError


@dataclass(frozen=True, slots=True)
class FusionSettings:
    """All numbers of the filter that are not in a calibration or drive file."""

    # how often the modes change, 1/s
    swing_to_quiet_per_s: float = 1.2
    swing_to_moving_per_s: float = 4.0
    quiet_to_swing_per_s: float = 2.8
    quiet_to_moving_per_s: float = 10.0
    moving_to_swing_per_s: float = 4.0
    moving_to_quiet_per_s: float = 20.0
    # how the force moves in each mode, shares of the weight
    swing_tau_s: float = 0.004
    swing_sd_share: float = 0.004
    quiet_walk_up_share_per_sqrt_s: float = 0.08
    quiet_walk_side_share_per_sqrt_s: float = 0.08
    moving_tau_s: float = 0.060
    moving_mean_share: float = 0.25
    moving_up_sd_share: float = 0.31
    moving_side_sd_share: float = 0.10
    # what a change of mode does
    touchdown_sd_share: float = 0.085
    touchdown_up_part: float = 0.85  # of that variance along the vertical, the rest in all directions
    lift_reset: float = 1.0  # 1: entering swing sets force, friction error and residual back; 0: it does not
    # what a stance with hardly any force costs
    stance_cost: float = 1.5
    stance_cost_share: float = 0.035
    stance_cost_cap: float = 3.0
    peak_tau_s: float = 6.0
    mode_floor: float = 1e-7
    # the foot reading
    residual_tau_s: float = 0.25
    residual_part: float = 0.95  # of the variance beyond the converter's noise: slow (state e), the rest is white
    residual_min_share: float = 0.001
    reading_min_share: float = 0.002  # white noise is never taken as smaller
    # torques: what inertia and friction ask for is known no better than its timing
    torque_timing_s: float = 0.003
    torque_timing_tau_s: float = 0.005
    axial_timing_s: float = 0.0005
    # decision
    on_p: float = 0.9
    off_p: float = 0.1
    on_s: float = 0.001
    off_s: float = 0.003
    early_s: float = 0.100  # within this time after touchdown ...
    early_off_s: float = 0.020  # ... lift-off must last this long
    contact_min_share: float = 0.017
    known_sd_share: float = 0.12  # torque alone decides where it sees the vertical force at least this well
    # zero observer
    zero_p: float = 0.95
    zero_wait_s: float = 0.025
    zero_tau_s: float = 0.5
    zero_max_share: float = 0.14
    zero_rate_share_per_s: float = 0.017
    zero_flag_share: float = 0.022
    start_torque_sd_Nm: float = 20.0
    # health
    stuck_s: float = 0.060
    stuck_ratio: float = 4.0  # and so many times the longest usual run of one value
    silent_s: float = 0.5
    stale_s: float = 0.030
    noisy_ratio: float = 4.0
    noisy_tau_s: float = 0.05
    noisy_min_share: float = 0.006
    disagree_chi2: float = 18.5  # 0.1 % point of chi squared, 4 degrees of freedom (table)
    disagree_s: float = 0.05
    dead_after_s: float = 0.05
    dead_sds: float = 6.0

    def __post_init__(self) -> None:
        for name in (field.name for field in fields(self)):
            value = getattr(self, name)
            if not (math.isfinite(value) and value >= 0.0):
                raise _bad(name, value, "a finite number, zero or above")
        for name in _POSITIVE:
            if getattr(self, name) <= 0.0:
                raise _bad(name, getattr(self, name), "above zero")
        for name in _SHARES_OF_ONE:
            if getattr(self, name) > 1.0:
                raise _bad(name, getattr(self, name), "between 0 and 1")
        if self.off_p >= self.on_p:
            raise _bad("off_p", self.off_p, f"below on_p = {self.on_p:g}")


_POSITIVE = (
    "swing_tau_s",
    "moving_tau_s",
    "peak_tau_s",
    "residual_tau_s",
    "zero_tau_s",
    "noisy_tau_s",
    "stance_cost_share",
    "torque_timing_tau_s",
)
_SHARES_OF_ONE = ("touchdown_up_part", "lift_reset", "mode_floor", "residual_part", "on_p", "off_p", "zero_p")


def _bad(name: str, value: object, allowed: str) -> SettingError:
    return SettingError(
        where=f"[fusion] {name}", what=f"the value is {value!r}, must be {allowed}", mend="Mend it, or leave it out."
    )


def settings_from_table(table: Mapping[str, object], where: str = "robot.toml") -> FusionSettings:
    """Return the settings with those of a `[fusion]` table in place of the starting values.

    Raises:
        SettingError: a name is not known, or a value is no number or out of its range.
    """
    known = {field.name for field in fields(FusionSettings)}
    changes: dict[str, float] = {}
    for name, value in table.items():
        if name not in known:
            raise SettingError(
                where=f"{where}, [fusion]",
                what=f"there is no setting {name!r}",
                mend=f"Use one of: {', '.join(sorted(known))}.",
            )
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise _bad(name, value, "a number")
        changes[name] = float(value)
    return replace(FusionSettings(), **changes)


def fill_filter_constants(
    settings: FusionSettings, weight_N: float, joints_of_leg: tuple[int, ...], c: np.record
) -> None:
    """Write the filter's constants into the one-element constants record.

    Args:
        settings: the numbers.
        weight_N: weight of the robot with its legs, newtons.
        joints_of_leg: true number of joints of each leg (the rest of the rows is padding).
        c: constants record (element 0 of an array of the layout's dtype); changed in place.
    """
    _fill_shares(settings, weight_N, c)
    _fill_plain(settings, c)
    rates = np.zeros((3, 3))
    rates[0, 1], rates[0, 2] = settings.swing_to_quiet_per_s, settings.swing_to_moving_per_s
    rates[1, 0], rates[1, 2] = settings.quiet_to_swing_per_s, settings.quiet_to_moving_per_s
    rates[2, 0], rates[2, 1] = settings.moving_to_swing_per_s, settings.moving_to_quiet_per_s
    c["fil_rate_per_s"][:] = rates
    legs, joints = len(joints_of_leg), c["fil_joint"].shape[0]
    keep = c["fil_mix_keep"]
    keep[:] = 1.0
    reset_states = [*range(3 + joints), 3 + 2 * joints]  # force, friction error, residual; never the motor torques
    for state in reset_states:
        keep[:, state, :legs] = 1.0 - settings.lift_reset
    for leg, count in enumerate(joints_of_leg):
        c["fil_joint"][:, leg] = np.arange(c["fil_joint"].shape[0]) < count


def _fill_shares(settings: FusionSettings, weight_N: float, c: np.record) -> None:
    touch_N2 = (settings.touchdown_sd_share * weight_N) ** 2
    c["fil_weight_N"][:] = weight_N
    c["fil_touch_up_N2"][:] = touch_N2 * settings.touchdown_up_part
    c["fil_touch_all_N2"][:] = touch_N2 * (1.0 - settings.touchdown_up_part)
    shares = {
        "fil_swing_sd_N": settings.swing_sd_share,
        "fil_quiet_up_N": settings.quiet_walk_up_share_per_sqrt_s,
        "fil_quiet_side_N": settings.quiet_walk_side_share_per_sqrt_s,
        "fil_moving_mean_N": settings.moving_mean_share,
        "fil_moving_up_N": settings.moving_up_sd_share,
        "fil_moving_side_N": settings.moving_side_sd_share,
        "fil_cost_N": settings.stance_cost_share,
        "fil_e_min_N": settings.residual_min_share,
        "fil_read_min_N": settings.reading_min_share,
        "fil_min_N": settings.contact_min_share,
        "fil_known_N": settings.known_sd_share,
        "fil_zero_max_N": settings.zero_max_share,
        "fil_zero_N_per_s": settings.zero_rate_share_per_s,
        "fil_zero_flag_N": settings.zero_flag_share,
        "fil_noisy_min_N": settings.noisy_min_share,
    }
    for name, share in shares.items():
        c[name][:] = share * weight_N


def _fill_plain(settings: FusionSettings, c: np.record) -> None:
    plain = {
        "fil_swing_tau_s": settings.swing_tau_s,
        "fil_moving_tau_s": settings.moving_tau_s,
        "fil_lift_reset": settings.lift_reset,
        "fil_cost_per_s": settings.stance_cost * 1000.0,  # the cost is counted per millisecond
        "fil_cost_cap": settings.stance_cost_cap,
        "fil_peak_tau_s": settings.peak_tau_s,
        "fil_floor": settings.mode_floor,
        "fil_e_tau_s": settings.residual_tau_s,
        "fil_e_part": settings.residual_part,
        "fil_on_p": settings.on_p,
        "fil_off_p": settings.off_p,
        "fil_on_s": settings.on_s,
        "fil_off_s": settings.off_s,
        "fil_early_s": settings.early_s,
        "fil_early_off_s": settings.early_off_s,
        "fil_zero_p": settings.zero_p,
        "fil_zero_wait_s": settings.zero_wait_s,
        "fil_zero_tau_s": settings.zero_tau_s,
        "fil_start_Nm": settings.start_torque_sd_Nm,
        "fil_timing_s": settings.torque_timing_s,
        "fil_timing_tau_s": settings.torque_timing_tau_s,
        "fil_axial_timing_s": settings.axial_timing_s,
        "fil_stuck_s": settings.stuck_s,
        "fil_stuck_ratio": settings.stuck_ratio,
        "fil_silent_s": settings.silent_s,
        "fil_stale_s": settings.stale_s,
        "fil_noisy_ratio": settings.noisy_ratio,
        "fil_noisy_tau_s": settings.noisy_tau_s,
        "fil_disagree_chi2": settings.disagree_chi2,
        "fil_disagree_s": settings.disagree_s,
        "fil_dead_after_s": settings.dead_after_s,
        "fil_dead_sds": settings.dead_sds,
    }
    for name, value in plain.items():
        c[name][:] = value
