"""Control charts: individuals, EWMA, and the check-standard chart of a calibrated line."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.special import stdtrit

from footcal.errors import SettingError
from footcal.records import BoolArray, FloatArray

D2_OF_TWO: Final = 1.128  # mean range of two normal values in standard deviations, as tables print it (2/sqrt(pi))
EWMA_WEIGHT: Final = 0.3
EWMA_WIDTH: Final = 3.0


@dataclass(frozen=True, slots=True, eq=False)
class Chart:
    """Values with their limits; all shapes (n,)."""

    value: FloatArray
    centre: float
    lower: FloatArray
    upper: FloatArray

    @property
    def out(self) -> BoolArray:
        """Which values lie outside the limits, shape (n,)."""
        return (self.value < self.lower) | (self.value > self.upper)


def individuals(values: FloatArray, base: int | None = None, width: float = 3.0) -> Chart:
    """Return the individuals chart: mean ± width · (mean moving range) / 1.128.

    Source: NIST/SEMATECH e-Handbook 6.3.2.2.

    Args:
        values: shape (n,), in order of time.
        base: how many of the first values set centre and limits; all where not given.
        width: limits in standard deviations.

    Raises:
        SettingError: fewer than two values in the base period.
    """
    period = values[:base]
    if len(period) < 2:
        raise SettingError(
            where="individuals chart",
            what=f"{len(period)} value(s) in the base period, 2 are needed",
            mend="Check again.",
        )
    centre = float(period.mean())
    reach = width * float(np.abs(np.diff(period)).mean()) / D2_OF_TWO
    return Chart(values, centre, np.full(len(values), centre - reach), np.full(len(values), centre + reach))


def ewma(
    values: FloatArray,
    sd: float,
    start: float = 0.0,
    *,
    weight: float = EWMA_WEIGHT,
    width: float = EWMA_WIDTH,
    settled: bool = False,
) -> Chart:
    """Return the exponentially weighted moving average chart.

    Law: e_t = w·x_t + (1 − w)·e_(t−1), e_0 = start; limits start ± width·sd·sqrt(w/(2 − w)·(1 − (1 − w)^(2t))).
    Source: NIST/SEMATECH e-Handbook 6.3.2.4, whose printed limits are the settled ones (t large).

    Args:
        values: shape (n,), in order of time.
        sd: standard deviation of a single value, above 0.
        start: where the average starts: the target.
        weight: of the newest value, above 0, at most 1.
        width: limits in standard deviations of the average.
        settled: limits for t large throughout, instead of the narrower ones of the first values.

    Raises:
        SettingError: sd or weight out of range.
    """
    if not (sd > 0.0 and 0.0 < weight <= 1.0):
        raise SettingError(
            where="EWMA chart",
            what=f"sd {sd:g}, weight {weight:g}: out of range",
            mend="Give sd > 0 and 0 < weight <= 1.",
        )
    average = np.empty(len(values))
    last = start
    for index, value in enumerate(values):
        last = weight * float(value) + (1.0 - weight) * last
        average[index] = last
    t = np.arange(1, len(values) + 1)
    share = np.ones(len(values)) if settled else 1.0 - (1.0 - weight) ** (2 * t)
    reach = width * sd * np.sqrt(weight / (2.0 - weight) * share)
    return Chart(average, start, start - reach, start + reach)


def check_standard(
    reference: FloatArray,
    measured: FloatArray,
    *,
    intercept: float,
    slope: float,
    residual_sd: float,
    dof: int,
    alpha: float = 0.05,
) -> Chart:
    """Return the chart of check standards read with a calibrated line: W = (measured − intercept)/slope − reference.

    Limits ± t · residual_sd / slope, t of the calibration's degrees of freedom at alpha shared over the standards of a
    day (1 − (1 − alpha)^(1/m), half in each tail), so that a good day stays inside with probability 1 − alpha.
    Source: NIST/SEMATECH e-Handbook 2.3.6.7 and 2.3.7.

    Args:
        reference: shape (days, m), values of the check standards.
        measured: shape (days, m), what the instrument read.
        intercept: of the calibration line, measured = intercept + slope · reference.
        slope: of the same line.
        residual_sd: of the same fit.
        dof: its degrees of freedom.
        alpha: chance of a false alarm a day.

    Returns:
        The chart over all values, days after one another, shape (days · m,).
    """
    each = 1.0 - (1.0 - alpha) ** (1.0 / reference.shape[1])
    reach = float(stdtrit(dof, 1.0 - each / 2.0)) * residual_sd / slope
    w = ((measured - intercept) / slope - reference).ravel()
    return Chart(w, 0.0, np.full(w.shape, -reach), np.full(w.shape, reach))


def run_start(out: BoolArray) -> int | None:
    """Return the index at which the run of signals that lasts to the end began; None where the last is no signal."""
    if not len(out) or not out[-1]:
        return None
    quiet = np.flatnonzero(~out)
    return int(quiet[-1]) + 1 if len(quiet) else 0
