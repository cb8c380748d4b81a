"""Electrical noise of simulated sensors on any time grid: white, 1/f, and mains hum; and the converter's averaging."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

FLICKER_TAUS_s: Final = np.logspace(-2.5, 2.5, 11)  # equal parts, evenly spread over log time, make a 1/f spectrum


@dataclass(frozen=True, slots=True)
class Noise:
    """Shares of full output; `total` is the rms at 1 kHz over some minutes."""

    total: float
    flicker_share: float  # of the variance
    hum_share: float  # of the variance
    hum_Hz: float = 50.0

    def draw(self, t_s: FloatArray, window_s: FloatArray, rng: np.random.Generator) -> FloatArray:
        """Return noise at each reading (n,), each an average over the `window_s` (n,) that ends there."""
        white_share = 1.0 - self.flicker_share - self.hum_share
        white = np.sqrt(white_share * 1e-3 / window_s) * rng.standard_normal(t_s.size)
        flicker = np.sqrt(self.flicker_share) * wander(t_s, FLICKER_TAUS_s, rng)
        phase = 2.0 * np.pi * self.hum_Hz * (t_s - 0.5 * window_s) + rng.uniform(0.0, 2.0 * np.pi)
        hum = np.sqrt(2.0 * self.hum_share) * np.sin(phase) * np.sinc(self.hum_Hz * window_s)
        result: FloatArray = self.total * (white + flicker + hum)
        return result


def wander(t_s: FloatArray, taus_s: FloatArray, rng: np.random.Generator) -> FloatArray:
    """Return a slow random signal of unit variance (n,): the sum of equal first-order processes with these times."""
    return _wander(t_s, taus_s, rng.standard_normal((t_s.size, taus_s.size)))


def windows_s(t_s: FloatArray, converter_s: float) -> FloatArray:
    """Return the time (n,) each reading averages over: since the last reading, at most one conversion."""
    step = np.diff(t_s, prepend=t_s[0] - converter_s)
    result: FloatArray = np.minimum(np.maximum(step, 1e-6), converter_s)
    return result


def window_mean(t_s: FloatArray, signal: FloatArray, ends_s: FloatArray, window_s: FloatArray) -> FloatArray:
    """Return the mean over the `window_s` (m,) before each of `ends_s` (m,) of a signal that is straight in between."""
    area = np.concatenate([[0.0], np.cumsum(0.5 * (signal[1:] + signal[:-1]) * np.diff(t_s))])

    def area_to(at_s: FloatArray) -> FloatArray:
        left = np.clip(np.searchsorted(t_s, at_s, side="right") - 1, 0, max(t_s.size - 2, 0))
        into_s = at_s - t_s[left]  # before the first sample the signal stood where it starts
        if t_s.size == 1:
            return np.asarray(into_s * signal[0])
        slope = (signal[left + 1] - signal[left]) / (t_s[left + 1] - t_s[left])
        return np.asarray(area[left] + into_s * (signal[left] + 0.5 * np.where(into_s < 0.0, 0.0, slope) * into_s))

    result: FloatArray = (area_to(ends_s) - area_to(ends_s - window_s)) / window_s
    return result


@njit(cache=True)
def _wander(t_s: FloatArray, taus_s: FloatArray, drawn: FloatArray) -> FloatArray:
    count = taus_s.size
    part = drawn[0].copy()
    out = np.empty(t_s.size)
    out[0] = np.sum(part) / np.sqrt(count)
    for i in range(1, t_s.size):
        total = 0.0
        for k in range(count):
            keep = np.exp(-(t_s[i] - t_s[i - 1]) / taus_s[k])
            part[k] = keep * part[k] + np.sqrt(1.0 - keep * keep) * drawn[i, k]
            total += part[k]
        out[i] = total / np.sqrt(count)
    return out


@njit(cache=True)
def low_pass(t_s: FloatArray, signal: FloatArray, tau_s: float) -> FloatArray:
    """Return the first-order lag of a signal that is straight between samples (n,), settled at the first sample."""
    out = np.empty(signal.size)
    out[0] = signal[0]
    for i in range(1, signal.size):
        z = (t_s[i] - t_s[i - 1]) / tau_s
        grown = -np.expm1(-z)
        ramp = grown / z if z > 1e-12 else 1.0
        out[i] = out[i - 1] * (1.0 - grown) + (1.0 - ramp) * signal[i] + (ramp - 1.0 + grown) * signal[i - 1]
    return out
