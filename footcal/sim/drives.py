"""Simulated drives: friction by bristles that bend and slip, rotor inertia, and the current a controller reports.

Friction is a bristle (presliding) law in the manner of Dahl and of Canudas de Wit et al. (IEEE Trans. Autom. Control
40, 1995), with the slip level falling with speed, rising with load, rippling with angle, and differing by direction.
A joint that sticks is held by a servo of finite stiffness: of a load change the bristles carry their share and the
motor the rest. That is why a screw at rest hides the load from the current.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

NOISE_A: Final = 0.2  # rms, of the current as reported
STEP_A: Final = 0.01  # resolution of the telegram
AMBIENT_C: Final = 25.0
GIVE_BACK_rad: Final = 0.02  # travel after which a controller has put its position right


@dataclass(frozen=True, slots=True)
class Drive:
    """One motor with its transmission; joint side unless the unit says otherwise."""

    ratio: float  # motor turns per joint turn
    kt_Nm_per_A: float  # motor side, at 25 deg C
    kt_temp_coeff_per_K: float
    rotor_inertia_kg_m2: float  # motor side
    coulomb_Nm: float
    breakaway_share: float  # breakaway over Coulomb
    stribeck_rad_per_s: float
    viscous_Nms_per_rad: float
    load_share: float  # friction added per load torque
    presliding_rad: float  # bending of the bristles at breakaway
    servo_Nm_per_rad: float  # how stiffly the controller holds the joint
    feedforward: float  # share of a load change that the controller knows beforehand
    lag_s: float
    delay_s: tuple[float, float]  # least and greatest age of a reported current
    offset_A: float = 0.0
    direction_share: float = 0.0  # Coulomb torque differs by this share from one direction to the other
    angle_share: float = 0.0  # and ripples by this share with the motor's angle
    ripple_share: float = 0.0  # torque ripple over torque

    def as_built(self, rng: np.random.Generator) -> Drive:
        """Return the drive as it really is: Kt 2 %, friction 20 to 30 %, rotor 5 %, lag 8 % off what is stated."""
        z = np.clip(rng.standard_normal(8), -2.0, 2.0)
        return replace(
            self,
            kt_Nm_per_A=self.kt_Nm_per_A * (1.0 + 0.02 * z[0]),
            rotor_inertia_kg_m2=self.rotor_inertia_kg_m2 * (1.0 + 0.05 * z[1]),
            coulomb_Nm=self.coulomb_Nm * (1.0 + float(rng.choice([-1.0, 1.0])) * rng.uniform(0.2, 0.3)),
            viscous_Nms_per_rad=self.viscous_Nms_per_rad * (1.0 + 0.25 * z[2]),
            load_share=self.load_share * (1.0 + 0.15 * z[3]),
            lag_s=self.lag_s * (1.0 + 0.08 * z[4]),
            offset_A=0.12 * z[5],
            direction_share=0.05 * z[6],
            angle_share=0.05,
            ripple_share=0.015,
        )


@dataclass(frozen=True, slots=True)
class DriveRun:
    """What a drive did; (n,) each, joint side but for the current."""

    motor_Nm: FloatArray  # torque of the motor, through the transmission
    friction_Nm: FloatArray  # bristles and viscous, opposing motion
    micro_rad: FloatArray  # presliding give, on top of the prescribed angle
    current_A: FloatArray  # as reported: lagged, late, noisy
    motor_temp_C: FloatArray


def draw_drives(kind: str, rng: np.random.Generator) -> tuple[Drive, Drive, Drive]:
    """Return the three drives of a leg as the maker states them: abduction, pitch, knee."""
    vary = 1.0 + 0.05 * rng.uniform(-1.0, 1.0, size=3)
    if kind == "belt":  # Coulomb 3 to 5 % of the 12 Nm peak of a trot
        first, second, third = (
            Drive(
                7.2, 0.085, -0.0010, 7.0e-5, 0.48 * v, 1.25, 0.15, 0.06, 0.03, 2e-3, 400.0, 0.85, 0.005, (0.001, 0.002)
            )
            for v in vary
        )
    else:  # Coulomb 60 to 150 % of the usual load torque (3 to 4.5, 1 to 4, 6 to 8 Nm, stand to trot)
        first, second, third = (
            Drive(62.0, 0.028, -0.0010, 1.1e-5, c * v, 1.35, 0.08, 0.9, 0.30, 1e-3, 1200.0, 0.0, 0.005, (0.001, 0.002))
            for v, c in zip(vary, (2.8, 2.4, 4.8), strict=True)
        )
    return first, second, third


def run_drive(
    drive: Drive,
    t_s: FloatArray,
    angle_rad: FloatArray,
    load_Nm: FloatArray,
    rng: np.random.Generator,
    temp_C: float = 32.0,
) -> DriveRun:
    """Return motor torque and reported current of a drive whose joint moves as prescribed under a load.

    Args:
        drive: the drive as built.
        t_s: times, (n,), evenly spaced.
        angle_rad: joint angle, (n,).
        load_Nm: torque the joint must exert on the leg, (n,): links less what the ground helps.
        rng: source of ripple phase, noise and jitter.
        temp_C: winding temperature at the start.

    Returns:
        Torques, give, current and winding temperature.
    """
    dt_s = float(t_s[1] - t_s[0])
    rate = np.gradient(angle_rad, dt_s)
    level = _slip_level_Nm(drive, angle_rad, rate, load_Nm)
    stiff = drive.coulomb_Nm * drive.breakaway_share / drive.presliding_rad
    steps = np.diff(angle_rad, prepend=angle_rad[0])
    known = np.diff(load_Nm, prepend=load_Nm[0]) * (1.0 - drive.feedforward)
    start = float(rng.uniform(-0.5, 0.5)) * level[0]
    bristle, micro = _bristles(steps, known, level, stiff, drive.servo_Nm_per_rad, start)
    friction = bristle + drive.viscous_Nms_per_rad * rate
    rotor = drive.ratio**2 * drive.rotor_inertia_kg_m2 * np.gradient(rate, dt_s)
    motor = load_Nm + friction + rotor
    shown, winding_C = _reported_A(drive, t_s, angle_rad, motor, rng, temp_C)
    return DriveRun(motor, friction, micro, shown, winding_C)


def _slip_level_Nm(drive: Drive, angle_rad: FloatArray, rate: FloatArray, load_Nm: FloatArray) -> FloatArray:
    """Return the friction at which the bristles slip: by speed, load, angle and direction."""
    fall = (drive.breakaway_share - 1.0) * np.exp(-((rate / drive.stribeck_rad_per_s) ** 2))
    ripple = drive.angle_share * np.sin(2.0 * drive.ratio * angle_rad) + drive.direction_share * np.tanh(rate / 0.02)
    level: FloatArray = drive.coulomb_Nm * (1.0 + fall) * (1.0 + ripple) + drive.load_share * np.abs(load_Nm)
    return level


@njit(cache=True, error_model="numpy")
def _bristles(
    steps: FloatArray, known: FloatArray, level: FloatArray, stiff: float, servo: float, start: float
) -> tuple[FloatArray, FloatArray]:
    """Integrate bristle torque and micro-motion.

    In a step the bristles see the prescribed motion plus a give, df = stiff (dx - |dx| f / level). The servo answers
    the give with `servo`, and takes it back as the joint travels on (GIVE_BACK_rad). dx follows in closed form from the
    balance of the increments, servo (dx - step) + known load change + df(dx) - df(step) = 0.
    """
    count = steps.size
    force, micro = np.empty(count), np.empty(count)
    f, give = start, 0.0
    for n in range(count):
        f = min(max(f, -level[n]), level[n])
        bend = f / level[n]
        step = steps[n]
        push = (
            servo * step
            + stiff * (step - abs(step) * bend)
            - known[n]
            - servo * min(abs(step) / GIVE_BACK_rad, 1.0) * give
        )
        sign = 1.0 if push > 0.0 else -1.0
        move = push / (servo + stiff * (1.0 - sign * bend))
        f += stiff * (move - abs(move) * bend)
        give += move - step
        force[n], micro[n] = f, give
    return force, micro


def _reported_A(
    drive: Drive, t_s: FloatArray, angle_rad: FloatArray, motor_Nm: FloatArray, rng: np.random.Generator, temp_C: float
) -> tuple[FloatArray, FloatArray]:
    """Return the current as the drive tells it, and the winding temperature that goes with it."""
    dt_s = float(t_s[1] - t_s[0])
    ideal = motor_Nm / (drive.ratio * drive.kt_Nm_per_A)
    winding_C = temp_C + _low_pass(0.02 * ideal**2, dt_s, 90.0)  # some kelvin over a minute of work
    true = ideal / (1.0 + drive.kt_temp_coeff_per_K * (winding_C - AMBIENT_C))
    phase = 7.0 * drive.ratio * angle_rad  # seven pole pairs; six ripples an electrical turn
    true = true * (1.0 + drive.ripple_share * np.sin(6.0 * phase + rng.uniform(0.0, 6.0))) + 0.08 * np.sin(
        phase + rng.uniform(0.0, 6.0)
    )
    lagged = _low_pass(true + drive.offset_A, dt_s, drive.lag_s, first=float(true[0] + drive.offset_A))
    late_s = rng.uniform(drive.delay_s[0], drive.delay_s[1], size=t_s.size)
    shown = np.interp(t_s - late_s, t_s, lagged) + NOISE_A * rng.standard_normal(t_s.size)
    return np.round(shown / STEP_A) * STEP_A, winding_C


def _low_pass(values: FloatArray, dt_s: float, tau_s: float, first: float = 0.0) -> FloatArray:
    """Return a first-order low-pass of the values, (n,), started at `first`."""
    from scipy.signal import lfilter

    keep = float(np.exp(-dt_s / tau_s))
    out: FloatArray = lfilter([1.0 - keep], [1.0, -keep], values, zi=[keep * first])[0]
    return out
