"""The search for bad steps: fit, judge every hold left out, set aside the worst first, and look again.

A few gross faults widen the scatter and bend the curve, so the first rounds take out only what is near the worst; and
each round judges all holds afresh, also those already out, so that a good hold which looked bad beside a gross fault
comes back.
"""

from __future__ import annotations

from collections.abc import Collection
from typing import Final

import numpy as np

from footcal.errors import FitRefusedError
from footcal.fit.hold_errors import HoldErrors, hold_errors, usual_scatter
from footcal.fit.inner_moves import moved_holds
from footcal.fit.inputs import FitInput
from footcal.fit.passes import Fitted, fit_terms
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.fit.set_aside import OFF_BY_SD, Aside, moved_aside, off_aside
from footcal.fit.terms import Terms
from footcal.records import FloatArray

NEAR_THE_WORST: Final = 0.25  # of the worst error over its scatter: the first rounds take no smaller ones
SMALLEST_SHARE: Final = 2e-4  # of full scale: below this nothing is set aside, however small the scatter
ROUNDS: Final = 7
MOST_ASIDE: Final = 0.3  # of all steps
MIDDLING_POWERS: Final = (0.5, 0.35)  # of dividers


def without_bad_steps(data: FitInput) -> tuple[Fitted, Rows, list[Aside]]:
    """Fit a middling choice of terms and set aside what does not fit it, until nothing changes any more.

    Raises:
        FitRefusedError: too many steps do not fit the rest.
    """
    terms = _middling_terms(data)
    out: dict[int, Aside] = {}
    for number in range(ROUNDS):
        rows = data.rows.without_holds(set(out))
        fitted = fit_terms(data.channel, data.reading, rows, terms)
        found = judged(data, fitted, rows, out, patient=number < ROUNDS - 2)
        if found.keys() == out.keys():
            break
        if len(found) > MOST_ASIDE * len(data.holds):
            raise FitRefusedError(
                data.foot_id,
                f"{len(found)} of {len(data.holds)} steps do not fit the rest",
                "Check masses, times and the fixture, and run the session again.",
            )
        out = found
    return fitted, data.rows.without_holds(set(out)), list(out.values())


def judged(
    data: FitInput, fitted: Fitted, fitted_rows: Rows, out: Collection[int], *, patient: bool = False
) -> dict[int, Aside]:
    """Return all holds that are bad by this fit, with the reason, in order of the holds.

    Args:
        data: what was read.
        fitted: a fit.
        fitted_rows: rows it was made of.
        out: holds that it did not see.
        patient: leave for a later round what is small beside the worst.
    """
    errors = hold_errors(fitted, fitted_rows, data.channel, data.reading, data.rows)
    sd = usual_scatter(errors, SMALLEST_SHARE / OFF_BY_SD)
    level = [hold for hold in data.holds if hold.kind != "tilted"]  # tilted ones come last
    moved = moved_holds(data.channel, fitted.apparent, level, data.session_of)
    limits = _limits(errors, sd, out, moved, patient=patient)
    found: dict[int, Aside] = {}
    for k, index in enumerate(errors.index.tolist()):
        if index in moved:
            found[index] = moved_aside(index, moved[index], data.capacity_N)
        elif abs(errors.mean[k]) > limits[k] * sd[k]:
            off_N, sd_N = float(errors.mean[k]) * data.capacity_N, float(sd[k]) * data.capacity_N
            found[index] = off_aside(index, data.holds[index], off_N, sd_N, data.place.gravity_m_per_s2)
    return found


def _limits(
    errors: HoldErrors, sd: FloatArray, out: Collection[int], moved: Collection[int], *, patient: bool
) -> FloatArray:
    """Return above how many standard deviations each hold is bad, shape (h,)."""
    limits = np.full(len(sd), OFF_BY_SD)
    still_in = ~np.isin(errors.index, [*out, *moved])
    if patient and still_in.any():
        worst = float(np.max(np.abs(errors.mean[still_in]) / sd[still_in]))
        limits[still_in] = max(OFF_BY_SD, NEAR_THE_WORST * worst)
    return limits


def _middling_terms(data: FitInput) -> Terms:
    """Return terms that serve to find bad steps before the real choice; for dividers the power that leaves least."""
    degree = max(1, min(3 if data.kind == "cell" else 4, data.levels - 2))
    straight, curved = data.temperatures > 1, data.temperatures > 2
    if data.kind != "resistive":
        return Terms(degree, temperature=straight, curved_temperature=curved)
    tried = [Terms(degree, power, temperature=straight, curved_temperature=curved) for power in MIDDLING_POWERS]
    left = [robust_sd(fit_terms(data.channel, data.reading, data.rows, terms).residual) for terms in tried]
    return tried[int(np.argmin(left))]
