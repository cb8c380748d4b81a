"""Where a sensor no longer follows its load: a reading stuck at the top or bottom, and a dead band near zero."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from footcal.fit.channel import Channel
from footcal.fit.reading import RawForm
from footcal.fit.rows import LEVEL_SHARE, Rows
from footcal.records import BoolArray, FloatArray, Hold
from footcal.sensor.transform import EDGE_SHARE, arm_ratios

FLAT_BELOW: Final = 0.8  # of the sensitivity between the two lowest loads: below this the curve is flat near zero


@dataclass(frozen=True, slots=True)
class Ends:
    """What was found at the ends of the range."""

    low: float | None  # counts at which readings stick, None where they do not
    high: float | None
    saturated: BoolArray  # (rows,) with a reading at an end, zeros excepted
    least_N: float | None  # lowest load that drove the reading to its end under load


def stuck_ends(raw: FloatArray, rows: Rows) -> tuple[float | None, float | None]:
    """Return the lowest and the highest reading where the sensor sticks there, counts, else None.

    It sticks where whole rows of samples show one and the same extreme value: rows of two loads at least, or of one
    while most rows show noise.
    """
    least = np.array([raw[a:b].min() for a, b in zip(rows.start, rows.stop, strict=True)])
    most = np.array([raw[a:b].max() for a, b in zip(rows.start, rows.stop, strict=True)])
    noisy = bool(np.median(most - least) > 0.0)
    long = rows.stop - rows.start >= 3

    def stuck(value: float) -> float | None:
        flat = long & (least == value) & (most == value)
        levels = np.unique(np.rint(rows.target[flat] / LEVEL_SHARE))
        return value if len(levels) > 1 or (noisy and len(levels) == 1) else None

    return stuck(float(raw.min())), stuck(float(raw.max()))


def find_ends(channel: Channel, rows: Rows, holds: Sequence[Hold], form: RawForm, capacity_N: float) -> Ends:
    """Return where the readings stick and which rows touch an end of the converter.

    The rows of a zero stay: an unloaded pad in a divider may well read the end, which is where its dead band starts.

    Args:
        channel: joined samples.
        rows: of the level holds.
        holds: that the rows belong to.
        form: wiring and range of the converter.
        capacity_N: full scale.
    """
    low, high = stuck_ends(channel.raw, rows)
    edge = EDGE_SHARE * form.raw_max if form.wiring != "counts" else 0.0
    bottom = form.raw_min + edge if low is None else max(low, form.raw_min + edge)
    top = form.raw_max - edge if high is None else min(high, form.raw_max - edge)
    touches = np.concatenate([[0], np.cumsum((channel.raw <= bottom) | (channel.raw >= top))])
    zero = np.array([holds[i].direction == "zero" for i in rows.hold])
    touched = touches[rows.stop] - touches[rows.start]
    saturated = (touched > 0) & ~zero
    loaded = saturated & (touched > 0.5 * (rows.stop - rows.start)) & _far_from_zero(channel, rows, zero)
    least_N = float(rows.target[loaded].min()) * capacity_N if loaded.any() else None
    return Ends(low, high, saturated, least_N)


def _far_from_zero(channel: Channel, rows: Rows, zero: BoolArray) -> BoolArray:
    """Which rows read nearer to the highest load than to zero: these stick under load, the others have not started."""
    means = np.array([channel.raw[a:b].mean() for a, b in zip(rows.start, rows.stop, strict=True)])
    unloaded = means[zero].mean() if zero.any() else means[int(np.argmin(rows.target))]
    off = np.abs(means - unloaded)
    return np.asarray(off > 0.5 * off[int(np.argmax(rows.target))])


def within(form: RawForm, ends: Ends) -> RawForm:
    """Return the converter's range with the ends at which plain counts stick; a divider's range is its supply's."""
    if form.wiring != "counts":
        return form
    low = form.raw_min if ends.low is None else max(ends.low, form.raw_min)
    high = form.raw_max if ends.high is None else min(ends.high, form.raw_max)
    return replace(form, raw_min=low, raw_max=high)


def end_notes(ends: Ends, rows: Rows, holds: Sequence[Hold], dead_N: float | None) -> tuple[str, ...]:
    """Say which steps were left out for touching an end, and how wide the dead band is."""
    notes = []
    steps = [str(holds[i].step) for i in np.unique(rows.hold[ends.saturated])]
    if steps and ends.least_N is not None:
        notes.append(
            f"saturated: from {ends.least_N:.4g} N on the reading sticks at its end; "
            f"samples of {_listed(steps)} at the end are left out, and the range ends below that load"
        )
    elif steps:
        notes.append(f"samples of {_listed(steps)} lie at the end of the converter near zero and are left out")
    if dead_N is not None:
        notes.append(f"dead_band: below some {dead_N:.2g} N the reading hardly moves, so small forces are a guess")
    return tuple(notes)


def _listed(steps: list[str]) -> str:
    shown = ", ".join(steps[:8])
    return f"step {shown}" if len(steps) == 1 else f"steps {shown}{' …' if len(steps) > 8 else ''}"


def dead_band_N(channel: Channel, rows: Rows, holds: Sequence[Hold], form: RawForm, capacity_N: float) -> float | None:
    """Return up to what load the reading hardly moves, newtons; None where it moves from the first load on.

    The line through the readings at the two lowest loads put on, drawn down to the reading at zero; stated where the
    sensitivity below the lowest load is less than four fifths of that above it.
    """
    u = arm_ratios(channel.raw, form.raw_max, form.wiring)
    means = np.array([u[a:b].mean() for a, b in zip(rows.start, rows.stop, strict=True)])
    words = [(holds[i].direction, holds[i].kind) for i in rows.hold]
    up = np.array([direction == "up" and kind == "hold" for direction, kind in words])
    zero = np.array([direction == "zero" and kind == "hold" for direction, kind in words])
    level = np.rint(rows.target / LEVEL_SHARE)
    lowest = np.unique(level[up])[:2]
    if not zero.any() or len(lowest) < 2:
        return None
    u0, f0 = float(np.median(means[zero])), float(rows.target[zero].mean())
    (u1, f1), (u2, f2) = (
        (float(np.median(means[up & (level == k)])), float(rows.target[up & (level == k)].mean())) for k in lowest
    )
    above = (u2 - u1) / (f2 - f1)
    if f1 <= f0 or (u1 - u0) / (f1 - f0) / above >= FLAT_BELOW:
        return None
    return max((f1 - (u1 - u0) / above) - f0, 0.0) * capacity_N
