"""Pictures of what is left over: errors of settled holds against force, time and temperature."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from footcal.records import BoolArray, FloatArray
from footcal.report.style import AMBER, DEEP, INK, PLUM, SHADE, dress, empty, legend
from footcal.report.thin import kept_of_scatter


def draw_errors(
    figure: Figure,
    x: FloatArray,
    error_N: FloatArray,
    rising: BoolArray,
    x_label: str,
    band_N: FloatArray | None = None,
) -> Figure:
    """Draw errors of settled holds against any quantity, loading and unloading apart.

    Args:
        figure: empty.
        x: shape (n,), NaN where unknown.
        error_N: reading less load, shape (n,).
        rising: shape (n,): load was being put on.
        x_label: with its unit.
        band_N: expanded uncertainty at each x, shape (n,), drawn as a band; left out where not given.
    """
    axes = figure.subplots()
    known = np.isfinite(x) & np.isfinite(error_N)
    if not known.any():
        empty(axes, f"nothing known of: {x_label}")
        dress(axes, x_label, "error, N")
        return figure
    if band_N is not None:
        order = np.flatnonzero(known)[np.argsort(x[known])]
        axes.fill_between(x[order], -band_N[order], band_N[order], color=SHADE, linewidth=0.0, label="±U (k = 2)")
    for mine, look, words in ((rising & known, DEEP, "loading"), (~rising & known, AMBER, "unloading, zero")):
        index = np.flatnonzero(mine)
        index = index[kept_of_scatter(len(index))]
        axes.plot(
            x[index],
            error_N[index],
            linestyle="",
            marker=look.marker,
            markersize=3.5,
            markerfacecolor=look.colour if look is DEEP else "white",
            markeredgecolor=look.colour,
            label=words,
        )
    axes.axhline(0.0, color=INK, linewidth=0.8)
    dress(axes, x_label, "error, N")
    legend(axes)
    return figure


def draw_left_out(figure: Figure, fitted_N: FloatArray, cycles_N: FloatArray, levels_N: FloatArray) -> Figure:
    """Draw how large the errors are: as fitted, with the cycle left out, with the load level left out.

    Args:
        figure: empty.
        fitted_N: errors of the holds as fitted, shape (n,).
        cycles_N: errors with the hold's cycle left out, shape (n,), NaN where it never was.
        levels_N: errors with the hold's load left out, shape (n,), NaN where it never was.
    """
    axes = figure.subplots()
    drawn = False
    for values, look, words in (
        (fitted_N, DEEP, "as fitted"),
        (cycles_N, AMBER, "cycle left out"),
        (levels_N, PLUM, "load left out"),
    ):
        size_N = np.sort(np.abs(values[np.isfinite(values)]))
        if len(size_N):
            share = 100.0 * (np.arange(len(size_N)) + 1) / len(size_N)
            axes.step(size_N, share, where="post", color=look.colour, linestyle=look.line, linewidth=1.4, label=words)
            drawn = True
    if drawn:
        axes.axhline(95.0, color=INK, linewidth=0.7, linestyle=(0, (1, 2)))
        legend(axes)
    else:
        empty(axes, "nothing could be left out")
    axes.set_ylim(0.0, 101.0)
    axes.set_xlim(left=0.0)
    dress(axes, "size of the error, N", "holds below, %")
    return figure
