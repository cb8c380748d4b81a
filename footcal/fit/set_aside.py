"""Steps that do not fit the rest, explained in words; never left out silently."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.fit.inner_moves import Move
from footcal.records import Hold

OFF_BY_SD: Final = 5.0  # a hold further off than this is set aside
SMALLEST_MASS_kg: Final = 0.005  # differences below this are no wrong mass


@dataclass(frozen=True, slots=True)
class Aside:
    """One step left out of the fit."""

    hold: int  # index into the holds
    reason: str
    fits_kg: float | None  # what the reading says the mass was, where that explains it


def moved_aside(index: int, move: Move, capacity_N: float) -> Aside:
    """Put into words what happened inside the window of a hold."""
    size_N = abs(move.size) * capacity_N
    if move.shape == "ringing":
        what = f"still ringing by {size_N:.2g} N from {move.t_s:.1f} s, for {move.lasts_s:.1f} s: load not at rest"
    elif move.shape == "tug":
        way = "up" if move.size > 0.0 else "down"
        what = f"the reading went {way} by {size_N:.2g} N at {move.t_s:.1f} s and stayed there: cable tug or slip"
    else:
        what = f"the reading moved by {size_N:.2g} N at {move.t_s:.1f} s, for {move.lasts_s:.1f} s: bump"
    return Aside(index, what, None)


def off_aside(index: int, hold: Hold, off_N: float, sd_N: float, gravity_m_per_s2: float) -> Aside:
    """Put into words that a whole hold reads wrong: by the mass that would fit, or by the force that is off.

    Args:
        index: of the hold.
        hold: the hold.
        off_N: load as entered less what the reading fits, newtons.
        sd_N: usual scatter of such a hold, newtons.
        gravity_m_per_s2: of the bench.
    """
    at = f"at {hold.t_start_s:.1f} s"
    reads = "less" if off_N > 0.0 else "more"
    plain = f"reads {abs(off_N):.3g} N {reads} than the load {at} (scatter is {sd_N:.2g} N)"
    if hold.direction == "zero":
        return Aside(index, f"{plain}: not unloaded, or a pull on the cable", None)
    if not np.isfinite(hold.mass_kg):
        return Aside(index, f"{plain}: wrong load, bump or tug", None)
    fits_kg = hold.mass_kg - off_N / gravity_m_per_s2
    if fits_kg <= 0.0 or abs(fits_kg - hold.mass_kg) < SMALLEST_MASS_kg:
        return Aside(index, f"{plain}: bump or tug", float(fits_kg))
    places = int(np.clip(np.ceil(-np.log10(max(3.0 * sd_N / gravity_m_per_s2, 1e-9))), 1, 3))
    return Aside(
        index,
        f"reading fits {fits_kg:.{places}f} kg, {hold.mass_kg:g} kg entered ({at}): wrong mass, or a pull throughout",
        float(fits_kg),
    )
