"""Steps that do not fit the rest: found, explained in words, and left out; never silently."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.fit.passes import Fitted
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.records import FloatArray, Hold, IntArray

OFF_BY_SD: Final = 5.0
MOVED_BY_SD: Final = 8.0
SMALLEST_MOVE_SHARE: Final = 1e-3  # of full scale: no move inside a window below this is a bump
SMALLEST_SHARE: Final = 2e-4  # of full scale: below this nothing is set aside, however small the scatter
MOST_SHARE: Final = 0.2  # of all steps; more than this is no longer a few bad steps


@dataclass(frozen=True, slots=True)
class Aside:
    """One step left out of the fit."""

    hold: int  # index into the holds
    reason: str
    fits_kg: float | None  # what the reading says the mass was, where that explains it


@dataclass(frozen=True, slots=True)
class HoldErrors:
    """Mean and inner spread of the residuals of each hold, share of full scale."""

    index: IntArray  # (h,) hold indices
    mean: FloatArray  # (h,)
    spread: FloatArray  # (h,) largest bin against the hold's mean
    load: FloatArray  # (h,) share of full scale


def hold_errors(fitted: Fitted, rows: Rows) -> HoldErrors:
    """Return the residuals hold by hold (measured load less what the model reads)."""
    index = np.unique(rows.hold[~rows.pump])
    mean, spread, load = (np.empty(len(index)) for _ in range(3))
    for k, hold in enumerate(index):
        mine = rows.hold == hold
        residual = fitted.residual[mine]
        mean[k], load[k] = residual.mean(), rows.target[mine][0]
        spread[k] = np.max(np.abs(residual - np.median(residual)))
    return HoldErrors(index, mean, spread, load)


def expected_sd(errors: HoldErrors) -> FloatArray:
    """Return the usual scatter of hold means, shape (h,): a part that is fixed and a part that grows with the load."""
    low = np.abs(errors.load) < 0.5 * np.abs(errors.load).max()
    fixed = robust_sd(errors.mean[low]) if low.any() else robust_sd(errors.mean)
    high = ~low & (errors.load > 0.0)
    rise = np.sqrt(max(robust_sd(errors.mean[high] / errors.load[high]) ** 2 - 0.0, 0.0)) if high.any() else 0.0
    overall = robust_sd(errors.mean)
    return np.maximum(np.hypot(fixed, 0.5 * rise * errors.load), 0.5 * overall)


def bad_holds(
    fitted: Fitted, rows: Rows, holds: Sequence[Hold], capacity_N: float, gravity_m_per_s2: float
) -> list[Aside]:
    """Return the holds whose mean is off by more than 5 robust standard deviations, or that moved inside the window."""
    errors = hold_errors(fitted, rows)
    sd = np.maximum(expected_sd(errors), SMALLEST_SHARE / OFF_BY_SD)
    quick = np.array([holds[int(i)].kind == "quick" for i in errors.index])
    moved_limit = np.empty(len(errors.index))
    for kind in (quick, ~quick):  # a whisked load rings longer than a settled one
        if kind.any():
            moved_limit[kind] = max(MOVED_BY_SD * robust_sd(errors.spread[kind]), SMALLEST_MOVE_SHARE)
    moved_limit = np.maximum(moved_limit, MOVED_BY_SD * sd)
    found = []
    for k, hold_index in enumerate(int(i) for i in errors.index):
        off_N = float(errors.mean[k]) * capacity_N
        if abs(errors.mean[k]) > OFF_BY_SD * sd[k]:
            found.append(_explained(hold_index, holds[hold_index], off_N, float(sd[k]) * capacity_N, gravity_m_per_s2))
        elif errors.spread[k] > moved_limit[k]:
            moved_N = float(errors.spread[k]) * capacity_N
            found.append(
                Aside(hold_index, f"the reading moved by {moved_N:.3g} N inside the window (bump or tug)", None)
            )
    limit = max(1, round(MOST_SHARE * len(errors.index)))
    worst = sorted(found, key=lambda aside: -abs(errors.mean[int(np.flatnonzero(errors.index == aside.hold)[0])]))
    return worst[:limit]


def _explained(index: int, hold: Hold, off_N: float, sd_N: float, gravity_m_per_s2: float) -> Aside:
    """Put into words what is off: a mass that fits, or a reading that fits no likely mass."""
    reads = "less" if off_N > 0.0 else "more"
    if hold.direction == "zero" or not np.isfinite(hold.mass_kg):
        return Aside(index, f"reads {abs(off_N):.3g} N {reads} than the load (scatter is {sd_N:.2g} N)", None)
    fits_kg = hold.mass_kg - off_N / gravity_m_per_s2
    likely_kg = round(fits_kg * 2.0) / 2.0 if fits_kg >= 1.0 else round(fits_kg * 10.0) / 10.0
    miss_kg = abs(fits_kg - likely_kg)
    if (
        likely_kg > 0.0
        and abs(likely_kg - hold.mass_kg) > 0.05
        and miss_kg < 3.0 * sd_N / gravity_m_per_s2 + 0.02 * likely_kg
    ):
        return Aside(index, f"reading fits {likely_kg:g} kg, {hold.mass_kg:g} kg entered", float(fits_kg))
    return Aside(
        index,
        f"reads {abs(off_N):.3g} N {reads} than the load (scatter is {sd_N:.2g} N): bump, tug or wrong mass",
        float(fits_kg),
    )
