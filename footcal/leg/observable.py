"""How much of a load change at rest a motor current can show, joint by joint and foot posture by posture."""

from __future__ import annotations

import numpy as np

from footcal.errors import SettingError
from footcal.leg.drive import JointDrive
from footcal.records import FloatArray


def backward_efficiency(efficiency_forward: float) -> float:
    """Return the efficiency of a reduction driven from its load, from that driven by its motor.

    Law: 2 - 1/eta, from one loss for both directions; at eta = 0.5 and below the drive locks itself. Source:
    machine-design texts (from memory); for a screw of small friction it is close to the exact one, see `screw`.

    Args:
        efficiency_forward: above 0, at most 1.

    Returns:
        Efficiency backward; 0 or below where the load cannot turn the motor.

    Raises:
        SettingError: the efficiency is out of its range.
    """
    if not 0.0 < efficiency_forward <= 1.0:
        raise SettingError(
            where="backward_efficiency, efficiency_forward",
            what=f"efficiency is {efficiency_forward:g}, must be above 0 and at most 1",
            mend="Give the ratio of power out to power in, motor driving.",
        )
    return 2.0 - 1.0 / efficiency_forward


def load_efficiencies(load_share: float) -> tuple[float, float]:
    """Return forward and backward efficiency that belong to a load-dependent friction share mu: 1/(1+mu) and 1-mu."""
    forward = 1.0 / (1.0 + load_share)
    return forward, backward_efficiency(forward)


def observable_share(drive: JointDrive, load_change_Nm: float, load_Nm: float = 0.0) -> float:
    """Return the share of a load change at rest that the current of a joint must show.

    A joint at rest holds its load anywhere within +-(breakaway + mu |load|), so that of a change d only what exceeds
    the width of that band is sure to reach the motor: max(0, |d| - 2 limit)/|d|, times the backward efficiency.
    Worked out here from the friction law of `friction`; a self-locking drive (backward efficiency 0 or below) shows
    nothing.

    Args:
        drive: friction of the joint.
        load_change_Nm: change of the load torque, joint side, not 0.
        load_Nm: load torque before the change.

    Returns:
        0 (current tells nothing) to 1 (current tells all).

    Raises:
        SettingError: load_change_Nm is 0 or not a number.
    """
    if not abs(load_change_Nm) > 0.0:
        raise SettingError(
            where="observable_share, load_change_Nm",
            what=f"is {load_change_Nm:g}, must not be 0",
            mend="Give the torque of the load change that is to be seen.",
        )
    _, backward = load_efficiencies(drive.load_share)
    if backward <= 0.0:
        return 0.0
    limit_Nm = max(drive.breakaway_Nm, drive.coulomb_Nm) + drive.load_share * abs(load_Nm)
    return backward * max(0.0, abs(load_change_Nm) - 2.0 * limit_Nm) / abs(load_change_Nm)


def observable_by_posture(
    drives: tuple[JointDrive, ...], jacobian_m_per_rad: FloatArray, force_change_N: FloatArray, torque_Nm: FloatArray
) -> FloatArray:
    """Return the observable share of each joint for a change of the foot's force in one posture.

    Args:
        drives: of the joints.
        jacobian_m_per_rad: of the foot, shape (3, joints), body frame.
        force_change_N: change of the ground's force on the foot, shape (3,), body frame.
        torque_Nm: load torques before the change, shape (joints,).

    Returns:
        Shape (joints,); NaN for a joint whose torque the change does not touch.
    """
    change_Nm = -np.asarray(jacobian_m_per_rad).T @ np.asarray(force_change_N)
    floor_Nm = 1e-9 * float(np.max(np.abs(change_Nm), initial=0.0))
    return np.array(
        [
            observable_share(drive, float(change), float(load)) if abs(change) > floor_Nm else np.nan
            for drive, change, load in zip(drives, change_Nm, torque_Nm, strict=True)
        ]
    )
