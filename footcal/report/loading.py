"""Pictures of the calibration itself: the session's course, the loading curve, the loop before and after, U(force)."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.figure import Figure

from footcal.records import BoolArray, FloatArray
from footcal.report.points import HoldPoints
from footcal.report.style import ALARM, AMBER, DEEP, FAINT, INK, MOSS, SHADE, TEXT_pt, dress, empty, legend
from footcal.report.thin import kept_of_curve


def draw_course(
    figure: Figure,
    t_s: FloatArray,
    force_N: FloatArray,
    temp_C: FloatArray,
    holds: HoldPoints,
    aside: Sequence[tuple[float, float]] = (),
) -> Figure:
    """Draw what was done, in order of time: force as calibrated, the loads beside it, temperature below.

    Args:
        figure: empty.
        t_s: times, shape (n,), seconds; pauses are left out of the axis.
        force_N: calibrated force, shape (n,).
        temp_C: shape (n,); NaN where there is no thermometer.
        holds: settled holds.
        aside: time and load of each hold that was set aside.
    """
    top, bottom = figure.subplots(2, 1, sharex=True, height_ratios=(3, 1))
    minutes, breaks = without_pauses(t_s)
    kept = kept_of_curve(force_N, 2400)
    top.plot(minutes[kept], force_N[kept], color=DEEP.colour, linewidth=0.7, label="force, calibrated")
    where = np.interp(holds.t_s, t_s, minutes)
    top.plot(where, holds.load_N, linestyle="", marker="_", markersize=5, color=AMBER.colour, label="load put on")
    if aside:
        times, loads = np.array(aside, dtype=np.float64).T
        top.plot(np.interp(times, t_s, minutes), loads, linestyle="", marker="X", color=ALARM.colour, label="set aside")
    if np.isfinite(temp_C).any():
        slow = kept_of_curve(temp_C, 400)
        bottom.plot(minutes[slow], temp_C[slow], color=INK, linewidth=0.8)
    else:
        empty(bottom, "no temperature recorded")
    for axes in (top, bottom):
        for at in breaks:
            axes.axvline(at, color=INK, linewidth=0.7, linestyle=(0, (1, 2)))
    dress(top, "", "force, N")
    dress(bottom, "minutes (pauses left out, dotted)", "°C")
    legend(top)
    return figure


def without_pauses(t_s: FloatArray, longest_s: float = 30.0) -> tuple[FloatArray, list[float]]:
    """Return times in minutes with every pause shortened to ten seconds, shape (n,), and where the pauses were."""
    steps = np.diff(t_s, prepend=t_s[:1])
    pause = steps > longest_s
    minutes = np.cumsum(np.where(pause, 10.0, steps)) / 60.0
    return minutes, [float(value) for value in minutes[pause]]


def draw_loading_curve(figure: Figure, load_N: FloatArray, raw: FloatArray, rising: BoolArray) -> Figure:
    """Draw the reading against the load, loading and unloading apart.

    Args:
        figure: empty.
        load_N: shape (n,).
        raw: counts, shape (n,).
        rising: shape (n,), bool: load was being put on.
    """
    axes = figure.subplots()
    up = np.asarray(rising, dtype=bool)
    thousands = len(raw) > 0 and float(np.nanmax(np.abs(raw))) >= 1e5
    shown, label = (raw / 1e3, "reading, 1000 counts") if thousands else (raw, "reading, counts")
    for mine, look, words in ((up, DEEP, "loading"), (~up, AMBER, "unloading")):
        axes.plot(
            load_N[mine],
            shown[mine],
            linestyle="",
            marker=look.marker,
            markersize=4.0,
            markerfacecolor=look.colour if look is DEEP else "white",
            markeredgecolor=look.colour,
            label=words,
        )
    dress(axes, "load, N", label)
    axes.ticklabel_format(axis="y", style="plain", useOffset=False)
    legend(axes)
    return figure


def draw_loop(figure: Figure, holds: HoldPoints) -> Figure:
    """Draw the error over each up/down cycle: by the curve alone on top, by the whole model below, same scale.

    Args:
        figure: empty.
        holds: settled holds of the fit.
    """
    top, bottom = figure.subplots(2, 1, sharex=True, sharey=True)
    pictured = ((top, holds.before_N, "curve alone, N"), (bottom, holds.after_N, "whole model, N"))
    for axes, error_N, label in pictured:
        for number, cycle in enumerate(_up_down_cycles(holds)):
            shown = number == 0
            axes.plot(holds.load_N[cycle], error_N[cycle], color=INK, linewidth=0.5, alpha=0.5)
            for directions, look, words in ((("up", "zero"), DEEP, "loading"), (("down",), AMBER, "unloading")):
                mine = cycle[holds.of(*directions)[cycle]]
                axes.plot(
                    holds.load_N[mine],
                    error_N[mine],
                    linestyle="",
                    marker=look.marker,
                    markersize=3.5,
                    markerfacecolor=look.colour if look is DEEP else "white",
                    markeredgecolor=look.colour,
                    label=words if shown else None,
                )
        axes.axhline(0.0, color=INK, linewidth=0.8)
        dress(axes, "load, N" if axes is bottom else "", label)
    if _up_down_cycles(holds):
        legend(top, columns=2)
    else:
        empty(top, "no up/down cycle")
    return figure


def _up_down_cycles(holds: HoldPoints) -> list[np.ndarray]:
    """Return the holds of each cycle that goes up and comes down again once; minor loops are none."""
    plain, found = holds.plain(), []
    for cycle in np.unique(holds.cycle[plain]):
        mine = np.flatnonzero(plain & (holds.cycle == cycle))
        ways = [holds.direction[i] for i in mine if holds.direction[i] != "zero"]
        if {"up", "down"} <= set(ways) and "up" not in ways[ways.index("down") :]:
            found.append(mine)
    return found


def draw_uncertainty(
    figure: Figure, force_N: FloatArray, U_N: FloatArray, error_N: FloatArray, at_N: FloatArray
) -> Figure:
    """Draw the stated band ±U (k = 2) against force, and the errors of loads that the fit had not seen inside it.

    Args:
        figure: empty.
        force_N: shape (m,), rising.
        U_N: expanded uncertainty at each force, shape (m,).
        error_N: left-out errors, shape (n,), may hold NaN.
        at_N: their loads, shape (n,).
    """
    axes = figure.subplots()
    axes.fill_between(force_N, -U_N, U_N, color=SHADE, linewidth=0.0, label="stated: ±U (k = 2)")
    axes.plot(force_N, U_N, color=DEEP.colour, linewidth=1.2)
    axes.plot(force_N, -U_N, color=DEEP.colour, linewidth=1.2)
    known = np.isfinite(error_N)
    axes.plot(
        at_N[known],
        error_N[known],
        linestyle="",
        marker=MOSS.marker,
        markersize=2.8,
        markerfacecolor="white",
        markeredgecolor=INK,
        markeredgewidth=0.6,
        label="found: loads left out of the fit",
    )
    axes.axhline(0.0, color=INK, linewidth=0.8)
    dress(axes, "force, N", "error, N")
    legend(axes, columns=2)
    return figure


def draw_budget(figure: Figure, sources: Sequence[str], u_N: FloatArray) -> Figure:
    """Draw the sources of uncertainty at the top of the range as bars, the largest on top.

    Args:
        figure: empty.
        sources: names, n.
        u_N: standard uncertainties, shape (n,).
    """
    axes = figure.subplots()
    order = np.argsort(np.nan_to_num(u_N))
    bars = axes.barh(
        [sources[i] for i in order], u_N[order], color=SHADE, edgecolor=DEEP.colour, linewidth=0.8, height=0.65
    )
    axes.bar_label(bars, fmt="%.2g N", fontsize=TEXT_pt - 1.5, color=INK, padding=2)
    dress(axes, "standard uncertainty at the top load, N", "", grid="x")
    axes.margins(x=0.16)
    axes.tick_params(axis="y", length=0)
    axes.spines["left"].set_color(FAINT)
    return figure
