"""Fewer points for the same picture: long curves keep their peaks, long scatters keep their spread."""

from __future__ import annotations

import numpy as np

from footcal.records import FloatArray, IntArray


def kept_of_curve(y: FloatArray, most: int = 1200) -> IntArray:
    """Return which samples draw the same line as all of them: lowest and highest of each stretch, NaN gaps kept.

    Args:
        y: shape (n,), may hold NaN.
        most: about how many samples to keep; at least 4.

    Returns:
        Indices, rising, first and last included; all of them where n is not above `most`.
    """
    n = len(y)
    if n <= most:
        return np.arange(n)
    stretches = max(most // 2, 1)
    size = -(-n // stretches)
    padded = np.concatenate([y, np.full(size * stretches - n, np.nan)]).reshape(stretches, size)
    known = np.isfinite(padded)
    first = np.arange(stretches) * size
    low = np.argmin(np.where(known, padded, np.inf), axis=1) + first
    high = np.argmax(np.where(known, padded, -np.inf), axis=1) + first
    gaps = np.flatnonzero(np.isfinite(y[:-1]) & ~np.isfinite(y[1:])) + 1  # one empty sample breaks the line
    return np.unique(np.clip(np.concatenate([[0, n - 1], low, high, gaps]), 0, n - 1))


def kept_of_scatter(n: int, most: int = 800) -> IntArray:
    """Return evenly spread indices of at most `most` out of n points."""
    return np.unique(np.linspace(0, max(n - 1, 0), min(n, most)).astype(np.int64)) if n else np.zeros(0, dtype=np.int64)
