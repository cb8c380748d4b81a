"""Figures as words: what is not known says so instead of printing nan."""

from __future__ import annotations

import datetime as dt
import math

import numpy as np

from footcal.records import FloatArray


def number(value: float | None, form: str) -> str:
    """Return a number in the given form, or a dash where it is missing or not finite."""
    return "–" if value is None or not math.isfinite(value) else format(value, form)


def percent_FS(value: float | None) -> str:
    """Return a share of full scale in per cent, or that it was not tested."""
    return "not tested" if value is None or not math.isfinite(value) else f"{value:.2g} % FS"


def decimals(full_N: float) -> int:
    """Return how many decimals show a ten-thousandth of full scale, newtons."""
    return max(0, math.ceil(-math.log10(1e-4 * full_N)))


def mean_of(values: FloatArray) -> float:
    """Return the mean; NaN of nothing."""
    return float(np.mean(values)) if len(values) else math.nan


def moment(iso: str | None) -> str:
    """Return a time of a calibration file (ISO 8601) as people read it, to the minute, UTC; a dash where there is none.

    Words that are no time come back as they are.
    """
    try:
        found = dt.datetime.fromisoformat(iso or "")
    except ValueError:
        return iso or "–"
    return found.astimezone(dt.UTC).strftime("%Y-%m-%d %H:%M UTC") if found.tzinfo else found.strftime("%Y-%m-%d %H:%M")
