"""The drift chart: zero and span of one foot from check to check, with their limits."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from footcal.records import FloatArray
from footcal.report.style import ALARM, AMBER, DEEP, INK, SHADE, dress, empty, legend


@dataclass(frozen=True, slots=True, eq=False)
class DriftSeries:
    """One quantity from check to check, newest last; shapes (checks,)."""

    days: Sequence[dt.date]
    value: FloatArray
    u: FloatArray  # standard uncertainty
    limit: float  # either way


def draw_drift(figure: Figure, span_pct: DriftSeries, zero_N: DriftSeries, since: dt.date | None = None) -> Figure:
    """Draw span above and zero below, bars of two standard uncertainties, the allowed band behind.

    Args:
        figure: empty.
        span_pct: change of span, per cent.
        zero_N: shift of zero, newtons.
        since: first day of the run that tells of a drift; marked where given.
    """
    top, bottom = figure.subplots(2, 1, sharex=True)
    for axes, series, label in ((top, span_pct, "span, %"), (bottom, zero_N, "zero, N")):
        _panel(axes, series)
        if since is not None:
            axes.axvline(_number(since), color=AMBER.colour, linestyle=":", linewidth=1.2, label="since")
        dress(axes, "", label)
    marked = list(span_pct.days)[:: max(1, -(-len(span_pct.days) // 4))]
    bottom.margins(x=0.08)
    bottom.set_xticks([_number(day) for day in marked], [day.isoformat() for day in marked])
    legend(top, columns=4)
    return figure


def _number(day: dt.date) -> float:
    return float(day.toordinal())


def _panel(axes: Axes, series: DriftSeries) -> None:
    if not len(series.value):
        empty(axes, "no checks")
        return
    days = np.array([_number(day) for day in series.days])
    axes.axhspan(-series.limit, series.limit, color=SHADE, alpha=0.6, linewidth=0.0, label="allowed")
    out = np.abs(series.value) > series.limit
    axes.errorbar(days, series.value, yerr=2.0 * series.u, fmt="none", ecolor=INK, elinewidth=0.8, capsize=2.0)
    axes.plot(days, series.value, color=DEEP.colour, linewidth=0.9)
    for mine, look, words in ((~out, DEEP, "inside"), (out, ALARM, "outside")):
        axes.plot(
            days[mine],
            series.value[mine],
            linestyle="",
            marker=look.marker,
            color=look.colour,
            markersize=5,
            label=words,
        )
    axes.axhline(0.0, color=INK, linewidth=0.8)
