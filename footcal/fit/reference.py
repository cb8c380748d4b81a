"""A reference cell on its own clock: clocks joined by knocks, its gain checked, its force laid beside the foot.

The two clocks differ by an unknown constant. It is found before any fitting, by the correlation of the force's rate of
change in sharp knocks; minimising the residual of the model instead is unsafe, because a model with creep can explain a
late reference. A converter that averages over its sample interval and one that does not are both tried.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.interpolate import CubicSpline, PPoly

from footcal.errors import SessionError
from footcal.files.session import Session
from footcal.fit.channel import Channel
from footcal.fit.robust import huber_weights, robust_sd
from footcal.records import FloatArray, IntArray

SEARCH_S: Final = 0.06
COARSE_S: Final = 0.001
FINE_S: Final = 0.00025
SMOOTH: Final = 4  # samples
WORST_CORRELATION: Final = 0.8
LONGEST_GAP_S: Final = 0.1  # between readings of the reference


@dataclass(frozen=True, slots=True)
class ReferenceSignal:
    """A reference cell's readings in channel time."""

    t_s: FloatArray  # (m,) by its own clock
    force_N: FloatArray  # (m,)
    windows_s: tuple[tuple[float, float], ...]  # pump stretches, channel time
    knocks_s: tuple[tuple[float, float], ...]  # knocks, channel time; the pump stretches where there were none
    area: PPoly  # integral of the force over time, a spline


@dataclass(frozen=True, slots=True)
class Aligned:
    """The reference beside the foot's samples."""

    offset_s: float  # reference clock less foot clock
    averaging_s: float  # the foot's converter is taken to average over this
    correlation: float  # of the rates of change in the knocks, at the offset found
    force_N: FloatArray  # (n,) at each foot sample; NaN outside the recording


def reference_signal(channel: Channel, sessions: list[Session]) -> ReferenceSignal | None:
    """Return the reference recording of the sessions, or None where there was no reference cell."""
    times: list[FloatArray] = []
    forces: list[FloatArray] = []
    pumps: list[tuple[float, float]] = []
    knocks: list[tuple[float, float]] = []
    for number, session in enumerate(sessions):
        offset_s = channel.offset_s[number]
        if session.reference is not None:
            t_s, force_N = session.reference
        elif session.ref_N is not None:
            known = np.isfinite(session.ref_N)
            t_s, force_N = session.t_s[known], session.ref_N[known]
        else:
            continue
        if len(t_s) < 10:
            continue
        times.append(t_s + offset_s)
        forces.append(force_N)
        windows = {kind: _windows(session, kind, offset_s) for kind in ("pump", "knock")}
        whole = [(float(t_s[0]) + offset_s, float(t_s[-1]) + offset_s)]
        pumps += windows["pump"] or whole
        knocks += windows["knock"]
    if not times:
        return None
    t_s, force_N = np.concatenate(times), np.concatenate(forces)
    area = CubicSpline(t_s, force_N).antiderivative()
    return ReferenceSignal(t_s, force_N, tuple(pumps), tuple(knocks or pumps), area)


def _windows(session: Session, kind: str, offset_s: float) -> list[tuple[float, float]]:
    steps = session.steps[session.steps["kind"] == kind]
    return [
        (float(a) + offset_s, float(b) + offset_s) for a, b in zip(steps["t_start_s"], steps["t_end_s"], strict=True)
    ]


def align(channel: Channel, reading_N: FloatArray, signal: ReferenceSignal, lag_s: float) -> Aligned:
    """Return the reference beside the foot's samples, its clock offset found by the knocks.

    Args:
        channel: the foot's samples.
        reading_N: force as a static fit reads it, shape (n,).
        signal: the reference recording.
        lag_s: known first-order lag of the foot sensor, seconds.

    Raises:
        SessionError: the foot and the reference do not show the same knocks.
    """
    t_s = channel.t_s
    stretches = [_stretch(t_s, window) for window in signal.knocks_s]
    stretches = [index for index in stretches if len(index) > 4 * SMOOTH]
    if not stretches:
        raise SessionError(
            "pump recording", "there are too few readings during the knocks", "Record knocks and pumping together."
        )
    averaging_s = float(np.median(np.concatenate([np.diff(t_s[index]) for index in stretches])))
    foot = np.concatenate([_rate(reading_N[index]) for index in stretches])

    def correlation(offset_s: float) -> float:
        moved = [_rate(reference_at(t_s[index], signal, offset_s, lag_s, averaging_s)) for index in stretches]
        reference = np.concatenate(moved)
        known = np.isfinite(reference)
        if known.sum() < 4 * SMOOTH:
            return -1.0
        x, y = foot[known], reference[known]
        return float(x @ y) / max(float(np.sqrt((x @ x) * (y @ y))), 1e-300)

    offset_s = _peak(correlation)
    best = correlation(offset_s)
    if best < WORST_CORRELATION:
        raise SessionError(
            "pump recording",
            f"foot and reference cell do not move together (correlation {best:.2f})",
            "Check that the reference lay under this foot, and knock sharply at the start and the end.",
        )
    return Aligned(offset_s, averaging_s, best, reference_at(t_s, signal, offset_s, lag_s, averaging_s))


def _stretch(t_s: FloatArray, window: tuple[float, float]) -> IntArray:
    """Samples from a little before to a little after a window."""
    return np.flatnonzero((t_s >= window[0] - 0.15) & (t_s <= window[1] + 0.15))


def _rate(force_N: FloatArray) -> FloatArray:
    """Difference of neighbouring means over four samples: a rate of change that slow sampling does not garble."""
    mean = np.convolve(force_N, np.full(SMOOTH, 1.0 / SMOOTH), mode="valid")
    return np.asarray(mean[SMOOTH:] - mean[:-SMOOTH])


def _peak(correlation: Callable[[float], float]) -> float:
    """Search coarsely, then finely, then by a parabola."""
    coarse = np.arange(-SEARCH_S, SEARCH_S + COARSE_S / 2, COARSE_S)
    near = float(coarse[int(np.argmax([correlation(offset) for offset in coarse]))])
    steps = np.arange(-8, 9) * FINE_S
    values = np.array([correlation(near + step) for step in steps])
    bow = np.polynomial.polynomial.polyfit(steps, values, 2)
    peak = -bow[1] / (2.0 * bow[2]) if bow[2] < 0.0 else steps[int(np.argmax(values))]
    return near + float(np.clip(peak, steps[0], steps[-1]))


def reference_at(
    t_s: FloatArray, signal: ReferenceSignal, offset_s: float, lag_s: float, averaging_s: float
) -> FloatArray:
    """Return the reference force as the foot's converter would have averaged it at each time, shape (n,); NaN outside.

    Between its readings the reference is a cubic spline: straight lines would miss 0.1 % of full scale at the turns of
    hand pumping sampled at 80 Hz. The lag is taken as a delay, which a first-order lag is for anything slower.
    """
    ends = np.asarray(t_s) - lag_s + offset_s
    known = (ends - averaging_s >= signal.t_s[0]) & (ends <= signal.t_s[-1])
    place = np.clip(np.searchsorted(signal.t_s, ends), 1, len(signal.t_s) - 1)
    known &= signal.t_s[place] - signal.t_s[place - 1] < LONGEST_GAP_S
    values = np.full(len(ends), np.nan)
    values[known] = (signal.area(ends[known]) - signal.area(ends[known] - averaging_s)) / averaging_s
    return values


def gain_and_zero(reading_N: FloatArray, reference_N: FloatArray) -> tuple[float, float]:
    """Return gain and zero of the reference against the static fit, reference = gain * reading + zero, robustly."""
    design = np.column_stack([reading_N, np.ones(len(reading_N))])
    weight = np.ones(len(reading_N))
    found = np.array([1.0, 0.0])
    for _ in range(5):
        root = np.sqrt(weight)
        found = np.linalg.lstsq(design * root[:, None], reference_N * root, rcond=None)[0]
        residual = reference_N - design @ found
        weight = huber_weights(residual / max(robust_sd(residual), 1e-9))
    return float(found[0]), float(found[1])
