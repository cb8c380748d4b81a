"""Simulated drives: friction limits, power, what the current shows at rest and moving."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from footcal.records import FloatArray
from footcal.sim.drives import Drive, DriveRun, draw_drives, run_drive

T_s = np.arange(4000) * 1e-3


def plain(kind: str) -> Drive:
    """Return a knee drive as stated: no offset, ripple or difference of directions."""
    return draw_drives(kind, np.random.default_rng(7))[2]


def run(drive: Drive, angle_rad: FloatArray, load_Nm: FloatArray) -> DriveRun:
    """Run with a local random source."""
    return run_drive(drive, T_s, angle_rad, load_Nm, np.random.default_rng(7), temp_C=25.0)


@pytest.mark.parametrize("kind", ["belt", "screw"])
def test_steady_sliding_friction_is_coulomb_plus_load_share_plus_viscous(kind: str) -> None:
    """At constant speed far above the Stribeck speed the friction is tau_c + mu |load| + b v, against the motion."""
    drive = plain(kind)
    friction = run(drive, 1.0 * T_s, np.full(T_s.size, -4.0)).friction_Nm[-500:]
    expected = drive.coulomb_Nm + drive.load_share * 4.0 + drive.viscous_Nms_per_rad * 1.0  # by hand
    assert friction == pytest.approx(np.full(500, expected), rel=1e-6)


def test_friction_turns_over_within_the_presliding_range() -> None:
    """After a reversal the bristles bend over within a few presliding angles (Dahl's law: exponential in travel)."""
    drive = replace(plain("screw"), viscous_Nms_per_rad=0.0, load_share=0.0, breakaway_share=1.0)
    angle = 0.1 * (1.0 - np.abs(T_s - 2.0))  # up at 0.1 rad/s, down from 2 s on
    friction = run(drive, angle, np.zeros(T_s.size)).friction_Nm
    travelled = 0.1 * (T_s - 2.0)
    at = int(np.searchsorted(travelled, 0.002))
    # Dahl, from saturation: f = -fc + 2 fc exp(-x/presliding); after two presliding angles of 1 mrad: fc (-1 + 2 e^-2).
    # The step of 0.1 mrad a sample makes Euler's error: 10 % of the exponential.
    assert friction[at] == pytest.approx(drive.coulomb_Nm * (-1.0 + 2.0 * np.exp(-2.0)), abs=0.06 * drive.coulomb_Nm)


@pytest.mark.parametrize(("kind", "least", "most"), [("belt", 0.9, 1.0), ("screw", 0.0, 0.35)])
def test_what_the_current_shows_of_a_load_change_at_rest(kind: str, least: float, most: float) -> None:
    """A belt shows nearly all of a small load change at rest, a screw little: its bristles carry the rest."""
    drive = plain(kind)
    load = 1.0 * np.clip((T_s - 1.0) / 0.5, 0.0, 1.0)
    motor = run(drive, np.zeros(T_s.size), load).motor_Nm
    assert least <= motor[-1] - motor[500] <= most


def test_friction_takes_power_and_never_gives_it() -> None:
    """Over whole cycles the motor's work exceeds the load's by what friction takes."""
    drive = plain("belt")
    angle = 0.3 * np.sin(2.0 * np.pi * 2.0 * T_s)
    load = 5.0 * np.cos(2.0 * np.pi * 1.0 * T_s)
    out = run(drive, angle, load)
    rate = np.gradient(angle, 1e-3)
    cycles = slice(1000, 3000)  # whole cycles, so rotor energy returns
    motor, taken, needed = (float(np.sum((x * rate)[cycles]) * 1e-3) for x in (out.motor_Nm, out.friction_Nm, load))
    assert motor == pytest.approx(taken + needed, abs=0.02)
    # By hand: Coulomb work is tau_c times the travel, 1.2 rad a cycle, 4 cycles; more by load, viscous, breakaway.
    assert drive.coulomb_Nm * 4.8 * 0.95 < taken < drive.coulomb_Nm * 4.8 * 1.8
    assert np.all((out.friction_Nm * rate)[np.abs(rate) > 1.0] > 0.0)


def test_belt_current_tells_the_load_torque_within_friction() -> None:
    """Current times Kt times ratio is the load torque within friction, rotor terms and noise."""
    drive = plain("belt")
    angle = 0.2 * np.sin(2.0 * np.pi * 0.5 * T_s)
    load = 6.0 + 3.0 * np.sin(2.0 * np.pi * 0.8 * T_s)
    out = run(drive, angle, load)
    believed = drive.ratio * drive.kt_Nm_per_A * out.current_A
    error = believed[200:] - load[200:]
    # By hand: Coulomb 0.5 x breakaway 1.25 + 3 % of 9 Nm + 0.04 viscous = 0.93; lag and delay 6.5 ms x 15 Nm/s = 0.10;
    # 2 ripple amplitudes and 4 sd of 0.2 A x 0.61 Nm/A = 0.5.
    assert np.abs(error).max() < 1.6
    assert np.sqrt(np.mean(error**2)) < 0.8


def test_current_is_late_by_lag_and_mean_delay() -> None:
    """A torque ramp is seen after 5 ms lag and 1.5 ms mean delay; a first-order lag delays a ramp by tau."""
    drive = replace(plain("belt"), coulomb_Nm=1e-6, load_share=0.0, kt_temp_coeff_per_K=0.0)
    out = run(drive, np.zeros(T_s.size), 3.0 * T_s)
    ideal = out.motor_Nm / (drive.ratio * drive.kt_Nm_per_A)
    slope = 3.0 / (drive.ratio * drive.kt_Nm_per_A)
    late_s = np.mean(ideal[500:] - out.current_A[500:]) / slope
    # Ripple (0.08 A at rest, of unknown phase) and noise (0.2 A / sqrt(3500)) set the tolerance: 0.09 A.
    assert late_s - 0.0065 == pytest.approx(0.0, abs=0.09 / slope)


def test_warm_windings_weaken_the_motor() -> None:
    """With -0.1 % per kelvin, 50 K more need 5 % more current for the same torque."""
    drive = plain("belt")
    still, load = np.zeros(T_s.size), np.full(T_s.size, 8.0)
    cold, hot = (run_drive(drive, T_s, still, load, np.random.default_rng(7), temp_C=c).current_A for c in (25.0, 75.0))
    assert np.mean(hot) / np.mean(cold) == pytest.approx(1.0 / (1.0 - 0.050), rel=0.005)


def test_the_drive_as_built_differs_from_the_stated_one_as_promised() -> None:
    """Friction is 20-30 % off, Kt a few per cent, over 200 drives."""
    rng = np.random.default_rng(7)
    stated = [plain("screw") for _ in range(200)]
    built = [drive.as_built(rng) for drive in stated]
    friction = np.array([b.coulomb_Nm / s.coulomb_Nm - 1.0 for b, s in zip(built, stated, strict=True)])
    constant = np.array([b.kt_Nm_per_A / s.kt_Nm_per_A - 1.0 for b, s in zip(built, stated, strict=True)])
    assert np.all((np.abs(friction) >= 0.2) & (np.abs(friction) <= 0.3))
    assert np.std(constant) == pytest.approx(0.02, rel=0.2)
