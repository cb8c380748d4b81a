"""The clock offset between an estimate and its truth, from the slopes of the force; truth on the estimate's times."""

from __future__ import annotations

import numpy as np

from footcal.files.truth import Truth
from footcal.records import FloatArray

REACH_s = 0.25
GRID_s = 0.001


def clock_offset_s(t_s: FloatArray, force_N: FloatArray, true_t_s: FloatArray, true_N: FloatArray) -> float:
    """Return by how much the truth's clock runs ahead of the estimate's, seconds: its events carry larger times.

    Cross-correlation of the forces' slopes over all legs, on a 1 ms grid, the peak refined by a parabola.

    Args:
        t_s: times of the estimate, (n,).
        force_N: estimated vertical forces, (n, legs).
        true_t_s: times of the truth, (m,).
        true_N: true vertical forces, (m, legs).

    Returns:
        The offset, within 0.25 s; 0.0 where the forces have no slope to compare.
    """
    start, end = max(t_s[0], true_t_s[0]), min(t_s[-1], true_t_s[-1])
    if end - start < 4 * REACH_s:
        return 0.0
    grid_s = np.arange(start, end, GRID_s)
    reach = round(REACH_s / GRID_s)
    total = np.zeros(2 * reach + 1)
    for l in range(force_N.shape[1]):
        ours = np.diff(np.interp(grid_s, t_s, force_N[:, l]))
        theirs = np.diff(np.interp(grid_s, true_t_s, np.nan_to_num(true_N[:, l])))
        total += _correlation(theirs, ours, reach)
    peak = int(np.argmax(total))
    if not total[peak] > 0.0:
        return 0.0
    shift = 0.0
    if 0 < peak < 2 * reach:
        before, at, after = total[peak - 1 : peak + 2]
        shift = 0.5 * (before - after) / (before - 2 * at + after)
    return float((peak - reach + shift) * GRID_s)


def _correlation(late: FloatArray, early: FloatArray, reach: int) -> FloatArray:
    """Return sum of late[k + lag] * early[k] for lag = -reach ... reach."""
    size = 1 << int(np.ceil(np.log2(len(late) + reach + 1)))
    both = np.fft.irfft(np.fft.rfft(late, size) * np.conj(np.fft.rfft(early, size)), size)
    return np.concatenate((both[-reach:], both[: reach + 1]))


def truth_at(truth: Truth, t_s: FloatArray, offset_s: float) -> tuple[FloatArray, FloatArray]:
    """Return true force (n, legs, 3) and contact (n, legs) at the estimate's times; NaN outside the truth's span.

    Forces are interpolated, contact is that of the nearest sample.
    """
    at_s = t_s + offset_s
    if len(at_s) == len(truth.t_s) and np.array_equal(at_s, truth.t_s):
        return truth.force_N, truth.contact
    outside = (at_s < truth.t_s[0]) | (at_s > truth.t_s[-1])
    force = np.full((len(t_s), *truth.force_N.shape[1:]), np.nan)
    for l in range(force.shape[1]):
        for axis in range(3):
            force[:, l, axis] = np.interp(at_s, truth.t_s, truth.force_N[:, l, axis])
    right = np.clip(np.searchsorted(truth.t_s, at_s), 1, len(truth.t_s) - 1)
    nearest = np.where(at_s - truth.t_s[right - 1] <= truth.t_s[right] - at_s, right - 1, right)
    contact = truth.contact[nearest].copy()
    force[outside], contact[outside] = np.nan, np.nan
    return force, contact
