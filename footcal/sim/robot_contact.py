"""When a foot is said to touch: the rule for the truth of simulated runs."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from footcal.records import BoolArray, FloatArray


def contact_truth(
    normal_N: FloatArray, dt_s: float, *, above_N: float = 1.0, gap_s: float = 0.012, touch_s: float = 0.008
) -> BoolArray:
    """Return whether a foot touches, (n,): force above 1 N, gaps < 12 ms closed, then touches < 8 ms dropped.

    Args:
        normal_N: force normal to the ground, (n,).
        dt_s: spacing of the samples.
        above_N: the force that counts as touching.
        gap_s: a shorter gap between two touches is closed.
        touch_s: a shorter touch is dropped.
    """
    touches = _without_short(normal_N > above_N, gap_s / dt_s, value=False)
    return _without_short(touches, touch_s / dt_s, value=True)


def _without_short(flags: BoolArray, least: float, *, value: bool) -> BoolArray:
    """Return the flags with runs of `value` shorter than `least` samples turned over; runs at the ends stay."""
    edges = np.flatnonzero(np.diff(flags.astype(np.int8))) + 1
    out = flags.copy()
    for first, last in pairwise(edges):
        if flags[first] == value and last - first < least - 1e-9:
            out[first:last] = not value
    return out
