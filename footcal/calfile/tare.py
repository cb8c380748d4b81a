"""Tare: the shift of raw counts that brings the unloaded foot to its zero, refused where it would do harm."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.calfile.calibration import Calibration
from footcal.errors import SettingError
from footcal.physics.gravity import STANDARD_GRAVITY_m_per_s2
from footcal.records import FloatArray, IntArray

FLAT_SHARE: Final = 0.1  # of the mid-range slope: below this a shift of counts says nothing about force
FAR_SHARE: Final = 0.05  # of full scale: further from zero than this the foot is loaded, or damaged
ROUNDS: Final = 6


@dataclass(frozen=True, slots=True)
class Tare:
    """A shift of raw counts and what it stands for."""

    raw: float  # counts to take from every reading
    shift_N: float  # force that the unloaded foot read before


def find_tare(
    calibration: Calibration,
    t_ns: IntArray,
    raw: FloatArray,
    temp_C: FloatArray,
    where: str,
    rest_N: float | None = None,
) -> Tare:
    """Return the shift for which the mean force over an unloaded stretch is that of the hanging foot.

    The shift is sought in raw counts with the loop and creep state as they are, so that what a pad still reads after
    unloading is not tared in.

    Args:
        calibration: of this foot.
        t_ns: times of the stretch, shape (n,), nanoseconds.
        raw: readings, shape (n,), counts.
        temp_C: shape (n,); NaN where there is no thermometer.
        where: what to call the stretch in an error.
        rest_N: axial force on the unloaded foot; None for a foot that hangs: zero, or minus the weight below the sensor
            where the calibration states its zero for a massless foot.

    Raises:
        SettingError: no reading in the stretch, the foot looks loaded or moving, or the curve is flat at zero.
    """
    known = np.isfinite(raw)
    if known.sum() < 3:
        raise SettingError(where, "there are fewer than 3 readings to tare on", "Give a longer stretch with --tare.")
    target_N = _hanging_N(calibration) if rest_N is None else rest_N
    shift, first_N = 0.0, float("nan")
    for _ in range(ROUNDS):
        compensator = calibration.compensator()
        compensator.tare_raw = shift
        force_N = compensator.run(t_ns[known], raw[known], temp_C[known]).force_N
        off_N = float(np.mean(force_N)) - target_N
        if not np.isfinite(first_N):
            first_N = off_N
            _refuse_loaded(calibration, off_N, force_N, where)
        slope = compensator.slope_N_per_count()
        if abs(slope) < FLAT_SHARE * _middle_slope(calibration):
            raise SettingError(
                where,
                "the sensor's curve is flat at zero, so counts say little about a small force",
                "Leave the tare out; let the zero be found while the foot swings.",
            )
        shift += off_N / slope
    return Tare(shift, first_N)


def _hanging_N(calibration: Calibration) -> float:
    zero = calibration.file.zero
    return -zero.mass_below_sensor_kg * STANDARD_GRAVITY_m_per_s2 if zero.stated_for == "massless foot" else 0.0


def _refuse_loaded(calibration: Calibration, off_N: float, force_N: FloatArray, where: str) -> None:
    capacity_N = calibration.capacity_N
    limit_N = max(FAR_SHARE * capacity_N, 4.0 * float(calibration.u_static_N(np.zeros(1))[0]))
    if abs(off_N) > limit_N:
        raise SettingError(
            where,
            f"the foot reads {off_N:.3g} N, more than {limit_N:.3g} N from zero: it is loaded, or needs the bench",
            "Tare with the foot in the air and the leg at rest, or check the foot.",
        )
    if float(np.std(force_N)) > 0.02 * capacity_N:
        raise SettingError(where, "the reading moves, so the foot is not at rest", "Tare with the leg at rest.")


def _middle_slope(calibration: Calibration) -> float:
    """Return the mean size of dF/draw between zero and the top of the range, newtons per count."""
    model = calibration.sensor_model
    ends = np.array([model.u_zero, model.u_span])
    if model.wiring == "pad_to_supply":
        ends = model.raw_max * ends / (1.0 + ends)
    elif model.wiring == "pad_to_ground":
        ends = model.raw_max / (1.0 + ends)
    return abs(model.force_max_N / float(ends[1] - ends[0]))
