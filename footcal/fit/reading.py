"""How the raw counts are to be read: wiring, converter range, zero and span, noise."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.errors import FitRefusedError, SessionError, SettingError
from footcal.fit.channel import Channel
from footcal.fit.passes import Reading
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.records import FloatArray, Hold
from footcal.sensor.temperature import THETA_SCALE_K
from footcal.sensor.transform import arm_ratios

CONVERTER_BITS: Final = (8, 10, 12, 14, 16, 18, 20, 24, 32)


@dataclass(frozen=True, slots=True)
class RawForm:
    """Wiring and range of the converter."""

    wiring: str
    raw_min: float
    raw_max: float
    assumed: tuple[str, ...]  # what was not given, in words


def raw_form(kind: str, raw: FloatArray, loaded_minus_zero: float, raw_max: float | None) -> RawForm:
    """Return how the counts are to be read.

    Args:
        kind: cell, resistive, magnetic, capacitive.
        raw: all readings, shape (n,).
        loaded_minus_zero: reading under the first press less the reading at zero.
        raw_max: top of the converter, counts; None takes the next usual converter.

    Raises:
        SettingError: `raw_max` is below a reading.
    """
    highest = float(np.max(np.abs(raw)))
    assumed = []
    if raw_max is None:
        bits = next((bits for bits in CONVERTER_BITS if highest <= 2**bits - 1), CONVERTER_BITS[-1])
        raw_max = max(2.0**bits - 1.0, highest)
        assumed.append(f"raw_max was not given: {raw_max:.0f} counts ({bits} bits) is taken")
    elif highest > raw_max:
        raise SettingError("--raw-max", f"a reading of {highest:g} lies above {raw_max:g}", "Give the converter's top.")
    if kind != "resistive":
        return RawForm("counts", 0.0 if raw.min() > 0.0 else -raw_max, raw_max, tuple(assumed))
    wiring = "pad_to_supply" if loaded_minus_zero > 0.0 else "pad_to_ground"
    assumed.append(f"wiring taken from the first press: {wiring.replace('_', ' ')}")
    return RawForm(wiring, 0.0, raw_max, tuple(assumed))


def first_press(channel: Channel, rows: Rows) -> float:
    """Return the mean raw reading of the higher loads less that of the lowest (zero, where it was recorded), counts.

    Raises:
        SessionError: the reading does not move with the load.
    """
    zero = rows.target == rows.target.min()
    means = np.array([channel.raw[a:b].mean() for a, b in zip(rows.start, rows.stop, strict=True)])
    top = rows.target >= 0.5 * rows.target.max()
    moved = float(np.median(means[top]) - np.median(means[zero]))
    if moved == 0.0:
        raise SessionError(
            "readings.csv, raw", "the reading does not move with the load", "Check the cable and the column."
        )
    return moved


def reading_of(channel: Channel, rows: Rows, holds: list[Hold], form: RawForm, temp_ref_C: float) -> Reading:
    """Return ratio, scaled temperature, zero, span and noise of the channel.

    Raises:
        FitRefusedError: the highest load does not read beyond zero.
    """
    ratio = arm_ratios(channel.raw, form.raw_max, form.wiring)
    zero_rows = [i for i, hold in enumerate(rows.hold) if holds[hold].direction == "zero"]
    zero_rows = zero_rows or [int(np.argmin(rows.target))]  # no zero was recorded: the lowest load stands in
    first = rows.hold[zero_rows[0]]
    opening = np.concatenate([ratio[rows.start[i] : rows.stop[i]] for i in zero_rows if rows.hold[i] == first])
    u_zero = float(np.median(opening))
    highest = int(np.argmax(rows.target))
    sign = 1.0 if np.median(ratio[rows.start[highest] : rows.stop[highest]]) > u_zero else -1.0
    reach = float(np.quantile(sign * (ratio - u_zero), 0.995))
    if reach <= 0.0:
        raise FitRefusedError(
            "readings.csv, raw",
            "the reading at the highest load lies on the wrong side of zero, or on it",
            "Check the masses of the steps, and whether the sensor saturates.",
        )
    theta = np.zeros(len(ratio)) if not channel.has_temperature else (channel.temp_C - temp_ref_C) / THETA_SCALE_K
    top = float(rows.target[highest])
    samples_per_row = float(np.median(rows.stop - rows.start))
    noise = robust_sd(np.diff(opening)) / np.sqrt(2.0) / reach * top
    return Reading(
        ratio=ratio,
        theta=np.asarray(theta),
        u_zero=u_zero,
        u_span=u_zero + sign * reach,
        noise=0.3 * noise / np.sqrt(samples_per_row),
        sample_noise=noise,
        interval_s=float(np.median(np.diff(channel.t_s))),
    )


def temperature_levels(channel: Channel, rows: Rows) -> tuple[float, int]:
    """Return the reference temperature and the number of different temperatures (more than 5 K apart) of the rows."""
    if not channel.has_temperature:
        return 22.0, 0
    means = np.sort([channel.temp_C[a:b].mean() for a, b in zip(rows.start, rows.stop, strict=True)])
    levels = 1 + int(np.sum(np.diff(means) > 5.0))
    return float(np.median(means)), levels
