"""Records that travel between the parts, and the one table of health and flag bits.

Frames: W world (z up), B body (x forward, y left, z up, REP-103), F foot. Ground reaction is the force of the ground
**on** the robot. Axial sensor force is positive when the ground presses the foot. Times inside the step are int64
nanoseconds; in files, float seconds from the start of the log.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntFlag
from typing import Final

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

NS_PER_S: Final = 1_000_000_000
RESET_GAP_NS: Final = 50_000_000  # a longer gap between ticks starts the filter afresh
SENSOR_GAP_NS: Final = 60 * NS_PER_S  # after a longer gap a sensor is taken as pressed and released since


class Health(IntFlag):
    """What is wrong, or unproved, with one foot's estimate. Bits 0-13 stand in `health`; `convert` adds 14 and 15."""

    STUCK = 1 << 0  # the reading has not moved while it should
    SATURATED = 1 << 1  # at an end of the converter's range
    SILENT = 1 << 2  # the foot channel gives nothing at all
    STALE = 1 << 3  # the last reading is too old to be used
    NOISY = 1 << 4  # noise well above the calibration's
    SPIKE = 1 << 5  # a lone sample far from both neighbours, taken out
    ZERO_DRIFT = 1 << 6  # the unloaded reading has moved away from zero
    TORQUE_DISAGREES = 1 << 7  # foot and motors tell different forces
    CURRENT_DEAD = 1 << 8  # a motor current gives nothing, or zero under load
    CLOCK_OFFSET = 1 << 9  # foot and motor streams are shifted in time
    UNCALIBRATED = 1 << 10  # no calibration file for this foot
    OUTSIDE_VALIDITY = 1 << 11  # force or temperature outside the calibrated range
    ZERO_UNCONFIRMED = 1 << 12  # no confident swing since power-up
    NOT_DYNAMIC = 1 << 13  # calibrated on slow holds only
    EXTRAPOLATED = 1 << 14  # above the highest calibrated load
    START_STATE_UNFORGOTTEN = 1 << 15  # hysteresis and creep state at power-up still matters


CONVERT_FLAGS: Final = (
    Health.SATURATED
    | Health.SPIKE
    | Health.OUTSIDE_VALIDITY
    | Health.ZERO_UNCONFIRMED
    | Health.NOT_DYNAMIC
    | Health.EXTRAPOLATED
    | Health.START_STATE_UNFORGOTTEN
)


def health_words(bits: int) -> list[str]:
    """Return the names of the bits set, lowest bit first, in lower case as files and screens print them."""
    return [flag.name.lower() for flag in Health if bits & flag and flag.name]


@dataclass(frozen=True, slots=True)
class RawSample:
    """One reading of one foot, exactly as the sensor gave it."""

    t_s: float  # seconds from the start of the log
    raw: float  # counts, or whatever the sensor gives
    temp_C: float  # at the sensor body; NaN where there is no thermometer


@dataclass(frozen=True, slots=True)
class Hold:
    """One settled load of a bench session."""

    step: int  # number in steps.csv, from 1
    cycle: int  # 0 before the first up/down cycle (presses), then from 1
    direction: str  # zero, up, down
    kind: str  # press, hold, quick, pump, knock, swap, tilted
    t_start_s: float  # settled window
    t_end_s: float
    t_load_s: float  # when the load stopped moving; t_start_s where not recorded
    load_N: float  # force on the sensor for a massless foot, positive when pressed
    load_u_N: float  # its standard uncertainty
    mass_kg: float  # as entered; NaN where load_N was given
    side_x_N: float = 0.0  # force of the load on the tilted foot along sensor x and y; load_N is then its axial part
    side_y_N: float = 0.0
    tilt_x_deg: float = 0.0  # how the foot was turned, see files.session_steps
    tilt_y_deg: float = 0.0


@dataclass(frozen=True, slots=True)
class Tick:
    """Everything the robot told at one instant. NaN means no new reading of that quantity."""

    t_ns: int  # nanoseconds from the start of the log, or of the monotonic clock
    raw: FloatArray  # (legs,) foot sensors, counts
    temp_C: FloatArray  # (legs,) at the foot sensors
    q_rad: FloatArray  # (legs, joints) encoder angles as sent (sign and offset not yet applied)
    dq_rad_per_s: FloatArray  # (legs, joints)
    current_A: FloatArray  # (legs, joints)
    motor_temp_C: FloatArray  # (legs, joints)
    quat_WB: FloatArray  # (4,) w, x, y, z: body to world
    gyro_B_rad_per_s: FloatArray  # (3,) angular rate of the body (IMU frame as sent)
    accel_B_m_per_s2: FloatArray  # (3,) specific force, +g up at rest (IMU frame as sent)


@dataclass(frozen=True, slots=True)
class LegEstimate:
    """What is known of one leg at one instant; forces of the ground on the foot, body frame."""

    leg: str
    t_ns: int
    p_contact: float  # probability of contact, 0 to 1
    contact: bool  # decided, with memory so that it does not flicker
    contact_known: bool  # False where neither sensor nor drive can decide
    event: int  # +1 touchdown, -1 lift-off, else 0
    t_event_s: float  # interpolated time of the event; NaN without one
    force_B_N: tuple[float, float, float]
    cov_B_N2: tuple[float, float, float, float, float, float]  # xx, xy, xz, yy, yz, zz
    axial_N: float  # calibrated reading of the foot sensor
    axial_u_N: float  # its standard uncertainty
    sensor_bias_N: float  # zero found in swing
    foot_age_s: float  # since the last foot reading
    motor_age_s: float  # since the last motor reading
    health: Health
