"""Friction against speed: Coulomb, Stribeck, viscous and load-dependent parts; and what a stuck joint can hide."""

from __future__ import annotations

import numpy as np

from footcal.errors import SettingError
from footcal.leg.drive import JointDrive
from footcal.records import FloatArray


def friction_Nm(
    drive: JointDrive,
    speed_rad_per_s: FloatArray,
    load_Nm: FloatArray | float = 0.0,
    stuck_speed_rad_per_s: float = 0.0,
) -> FloatArray:
    """Return the torque that friction takes from the motor at a speed, joint side.

    Law: sign(v) * [Fc + (Fs - Fc) exp(-(v/vs)^2) + mu |load|] + b v. Source: Canudas de Wit, Olsson, Astrom,
    Lischinsky, IEEE Trans. Autom. Control 40 (1995), steady state; the load-dependent part as usual for gears.

    Args:
        drive: Fc, Fs, vs, b and mu of the joint.
        speed_rad_per_s: joint speeds, shape (n,).
        load_Nm: torque the load asks of the joint, shape (n,) or one number.
        stuck_speed_rad_per_s: above 0, sign(v) becomes the smooth tanh(v/this), as the filter uses it; at 0 the jump
            stays, and at standstill the value is the breakaway limit.

    Returns:
        Shape (n,), newton metres, with the sign of the speed.

    Raises:
        SettingError: stuck_speed_rad_per_s is below 0.
    """
    if not stuck_speed_rad_per_s >= 0.0:
        raise SettingError(
            where="friction_Nm, stuck_speed_rad_per_s",
            what=f"is {stuck_speed_rad_per_s:g}, must be 0 or above",
            mend="Give 0 for the law with its jump.",
        )
    v = np.asarray(speed_rad_per_s, dtype=np.float64)
    bump = (drive.breakaway_Nm - drive.coulomb_Nm) * np.exp(-((v / drive.stribeck_rad_per_s) ** 2))
    limit = drive.coulomb_Nm + bump + drive.load_share * np.abs(load_Nm)
    sign = np.tanh(v / stuck_speed_rad_per_s) if stuck_speed_rad_per_s > 0.0 else np.where(v < 0.0, -1.0, 1.0)
    return np.asarray(sign * limit + drive.viscous_Nms_per_rad * v)
