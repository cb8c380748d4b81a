"""The pump recording's rows: the reference cell laid beside the foot, its gain and zero checked by the masses."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np

from footcal.fit.features import mean_features
from footcal.fit.inputs import FitInput
from footcal.fit.passes import Fitted
from footcal.fit.reference import Aligned, ReferenceSignal, align, gain_and_zero, reference_signal
from footcal.fit.rows import Rows, pump_rows
from footcal.records import FloatArray

AROUND_s: Final = 0.5  # samples before and after the recording that are read as well


def with_reference(data: FitInput, fitted: Fitted) -> tuple[Aligned | None, Rows | None]:
    """Join the reference cell's clock to the foot's and return the rows of the pump recording.

    A cell calibrated on masses judges the reference's gain and zero better than its sheet does, so they are taken from
    the fit to the holds; a pad does not, and its reference stands as it is.

    Args:
        data: the sessions.
        fitted: a fit to the holds alone.

    Raises:
        SessionError: foot and reference do not show the same knocks.
    """
    signal = reference_signal(data.channel, list(data.sessions))
    if signal is None:
        return None, None
    reading_N = _reading_N(data, fitted, signal)
    if data.kind == "cell":  # so little memory that the pumping may help to join the clocks; a pad's loop would mislead
        signal = replace(signal, knocks_s=(*signal.knocks_s, *signal.windows_s))
    aligned = align(data.channel, reading_N, signal, data.lag_s)
    force_N = aligned.force_N
    if data.kind == "cell":
        known = np.isfinite(force_N) & np.isfinite(reading_N)
        gain, zero_N = gain_and_zero(reading_N[known], force_N[known])
        force_N = (force_N - zero_N) / gain
    pump = pump_rows(data.channel, list(signal.windows_s), force_N, data.capacity_N)
    return replace(aligned, force_N=force_N), pump if len(pump.start) else None


def _reading_N(data: FitInput, fitted: Fitted, signal: ReferenceSignal) -> FloatArray:
    """Return the fitted force at each sample of the recording, shape (n,), newtons; NaN elsewhere."""
    t_s = data.channel.t_s
    wanted = np.zeros(len(t_s), dtype=bool)
    for first_s, last_s in (*signal.windows_s, *signal.knocks_s):
        wanted |= (t_s >= first_s - AROUND_s) & (t_s <= last_s + AROUND_s)
    samples = np.flatnonzero(wanted)
    features = mean_features(
        data.channel.t_ns, fitted.apparent, data.reading.theta, fitted.creep_undone, samples, samples + 1
    )
    reading_N = np.full(len(t_s), np.nan)
    reading_N[samples] = features @ fitted.coefficients * data.capacity_N
    return reading_N
