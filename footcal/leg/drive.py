"""A joint's drive as the step uses it: from the drive file where there is one, else from the description."""

from __future__ import annotations

from dataclasses import dataclass

from footcal.leg.drivefile import DriveFile, DriveJoint
from footcal.leg.motor import torque_constant_Nm_per_A
from footcal.leg.schema import Friction, Joint

MAKER_KT_SHARE = 0.03  # standard uncertainty of a maker's torque constant; common practice, no source
MAKER_TEMP_C = 25.0  # temperature a maker's torque constant holds for; common practice, no source
CURRENT_NOISE_A = 0.2  # of one current reading where nothing was identified; common practice, no source
STRIBECK_rad_per_s = 0.1  # joint side, where nothing was identified; common practice, no source


@dataclass(frozen=True, slots=True)
class JointDrive:
    """Figures of one joint's drive; friction and rotor seen from where the unit says, ratio apart."""

    kt_Nm_per_A: float  # motor side; 0 where the joint has no motor current
    kt_u_share: float  # relative standard uncertainty
    kt_temp_coeff_per_K: float
    kt_temp_C: float  # temperature the torque constant holds for
    rotor_inertia_kg_m2: float  # motor side
    current_offset_A: float
    current_noise_A: float
    coulomb_Nm: float  # joint side, as all friction
    breakaway_Nm: float
    stribeck_rad_per_s: float
    viscous_Nms_per_rad: float
    load_share: float
    lag_s: float  # current lag and mean delay together


def joint_drive(joint: Joint, identified: DriveJoint | None = None, temp_C: float | None = None) -> JointDrive:
    """Return a joint's drive: the identified figures where given, else those of the description.

    Args:
        joint: the joint of the description.
        identified: its entry in the drive file, or None.
        temp_C: motor temperature the identified torque constant holds for, or None.

    Returns:
        The drive.
    """
    if identified is not None:
        u_kt = identified.u.kt_Nm_per_A
        return JointDrive(
            kt_Nm_per_A=identified.kt_Nm_per_A,
            kt_u_share=MAKER_KT_SHARE if u_kt is None else u_kt / identified.kt_Nm_per_A,
            kt_temp_coeff_per_K=joint.kt_temp_coeff_per_K,
            kt_temp_C=MAKER_TEMP_C if temp_C is None else temp_C,
            rotor_inertia_kg_m2=joint.rotor_inertia_kg_m2,
            current_offset_A=identified.current_offset_A,
            current_noise_A=identified.current_noise_A,
            coulomb_Nm=identified.coulomb_Nm,
            breakaway_Nm=identified.breakaway_Nm,
            stribeck_rad_per_s=identified.stribeck_rad_per_s,
            viscous_Nms_per_rad=identified.viscous_Nms_per_rad,
            load_share=identified.load_share,
            lag_s=identified.delay_s + identified.lag_s,
        )
    friction = joint.friction or Friction(coulomb_Nm=0.0)
    return JointDrive(
        kt_Nm_per_A=nominal_kt_Nm_per_A(joint),
        kt_u_share=MAKER_KT_SHARE,
        kt_temp_coeff_per_K=joint.kt_temp_coeff_per_K,
        kt_temp_C=MAKER_TEMP_C,
        rotor_inertia_kg_m2=joint.rotor_inertia_kg_m2,
        current_offset_A=0.0,
        current_noise_A=CURRENT_NOISE_A,
        coulomb_Nm=friction.coulomb_Nm,
        breakaway_Nm=friction.coulomb_Nm,
        stribeck_rad_per_s=STRIBECK_rad_per_s,
        viscous_Nms_per_rad=friction.viscous_Nms_per_rad,
        load_share=friction.load_share,
        lag_s=joint.current_delay_s + joint.current_lag_s,
    )


def nominal_kt_Nm_per_A(joint: Joint) -> float:
    """Return the maker's torque constant, motor side; 0 for a joint without one."""
    if joint.kt_Nm_per_A is not None:
        return joint.kt_Nm_per_A
    return 0.0 if joint.kv_rpm_per_V is None else torque_constant_Nm_per_A(joint.kv_rpm_per_V)


def leg_drives(joints: tuple[Joint, ...], drive: DriveFile | None) -> tuple[JointDrive, ...]:
    """Return the drives of all joints of a leg.

    Args:
        joints: of the description.
        drive: the leg's drive file, or None.

    Returns:
        One drive a joint.
    """
    if drive is None:
        return tuple(joint_drive(joint) for joint in joints)
    return tuple(joint_drive(joint, found, drive.temp_C) for joint, found in zip(joints, drive.joints, strict=True))
