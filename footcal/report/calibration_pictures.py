"""The pictures of a calibration report, each with the words for those who can't see it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from footcal.calfile.schema import BudgetLine
from footcal.fit.outcome import FitResult
from footcal.records import FloatArray
from footcal.report.loading import (
    draw_budget,
    draw_course,
    draw_loading_curve,
    draw_loop,
    draw_uncertainty,
    without_pauses,
)
from footcal.report.page import Picture, picture
from footcal.report.points import HoldPoints
from footcal.report.residuals import draw_errors, draw_left_out
from footcal.report.style import new_figure
from footcal.report.words import number


def curve_pictures(result: FitResult, points: HoldPoints) -> tuple[Picture, ...]:
    """Return course, loading curve and loop."""
    data = result.data
    t_s = data.channel.t_s - float(data.channel.t_s[0])
    force_N = result.calibration.force(t_s, data.channel.raw, data.channel.temp_C).force_N
    aside = [_place(result, entry.hold) for entry in result.asides]
    return (
        picture(
            draw_course(new_figure(180.0, 82.0), t_s, force_N, data.channel.temp_C, points, aside),
            "course",
            "The session, in order of time",
            f"Calibrated force and loads put on over {t_s[-1] / 60.0:.0f} minutes, temperature below; "
            f"{len(aside)} steps set aside.",
            wide=True,
        ),
        loading_picture(points, "loading", "Loading curve"),
        loop_picture(points, "loop", "Loop, before and after"),
    )


def loading_picture(points: HoldPoints, name: str, title: str) -> Picture:
    """Return reading against load."""
    zero, top = int(np.argmin(points.load_N)), int(np.argmax(points.load_N))
    return picture(
        draw_loading_curve(new_figure(height_mm=92.0), points.load_N, points.raw, points.of("up")),
        name,
        title,
        f"Reading against load: {points.raw[zero]:.0f} counts at {points.load_N[zero]:.1f} N, "
        f"{points.raw[top]:.0f} counts at {points.load_N[top]:.1f} N, loading and unloading apart.",
        caption="Mean counts in each settled window.",
    )


def loop_picture(points: HoldPoints, name: str, title: str) -> Picture:
    """Return the error over each cycle, by the curve alone and by the whole model."""
    before_N, after_N = loop_width_N(points, points.before_N), loop_width_N(points, points.after_N)
    widest = f"{number(before_N, '.3g')} N by the curve alone, {number(after_N, '.3g')} N by the whole model"
    return picture(
        draw_loop(new_figure(height_mm=92.0), points),
        name,
        title,
        f"Error over each up and down cycle; the widest gap at one load is {widest}.",
        caption=f"Widest gap at one load: {widest}.",
    )


def foot_pictures(result: FitResult, points: HoldPoints, name: str, title: str) -> tuple[Picture, ...]:
    """Return the short set for a page about several feet: loading curve, loop, errors by force."""
    band_N = 2.0 * result.calibration.u_static_N(points.load_N)
    figure = draw_errors(new_figure(), points.load_N, points.after_N, points.of("up"), "load, N", band_N)
    rms_N = float(np.sqrt(np.mean(points.after_N**2)))
    words = f"{len(points.after_N)} holds, RMS {rms_N:.3g} N, largest {_largest(points.after_N)}."
    trust = trust_pictures(result, points)[0]
    return (
        loading_picture(points, f"loading_{name}", f"Loading curve, {title}"),
        loop_picture(points, f"loop_{name}", f"Loop, {title}"),
        picture(figure, f"errors_{name}", f"Errors by force, {title}", words, caption=words),
        replace(trust, name=f"uncertainty_{name}", title=f"Stated uncertainty, {title}"),
    )


def _place(result: FitResult, index: int) -> tuple[float, float]:
    data, hold = result.data, result.data.holds[index]
    start_s = hold.t_start_s + float(data.channel.offset_s[data.session_of[index]]) - float(data.channel.t_s[0])
    return start_s, hold.load_N


def loop_width_N(points: HoldPoints, error_N: FloatArray) -> float:
    """Return the widest gap between unloading and loading at one load of one cycle, newtons; NaN without a cycle."""
    widest = np.nan
    plain, up, down = points.plain(), points.of("up"), points.of("down")
    for i in np.flatnonzero(plain & down):
        near = plain & up & (points.cycle == points.cycle[i]) & (np.abs(points.load_N - points.load_N[i]) < 0.05)
        if near.any():
            widest = np.nanmax([widest, abs(float(error_N[i] - error_N[near].mean()))])
    return float(widest)


def error_pictures(result: FitResult, points: HoldPoints) -> tuple[Picture, ...]:
    """Return errors against force, time and temperature, and how large they are."""
    rising = points.of("up")
    band_N = 2.0 * result.calibration.u_static_N(points.load_N)
    rms_N = float(np.sqrt(np.mean(points.after_N**2)))
    found = []
    for name, title, x, label, band in (
        ("by_force", "Errors by force", points.load_N, "load, N", band_N),
        ("by_time", "Errors by time", without_pauses(points.t_s, 300.0)[0], "minutes, long pauses left out", None),
        ("by_temperature", "Errors by temperature", points.temp_C, "temperature, °C", None),
    ):
        figure = draw_errors(new_figure(), x, points.after_N, rising, label, band)
        words = f"{title}: {len(points.after_N)} holds, RMS {rms_N:.3g} N, largest {_largest(points.after_N)}."
        found.append(picture(figure, name, title, words))
    sizes = draw_left_out(new_figure(), points.after_N, points.cycle_out_N, points.level_out_N)
    words = (
        f"Share of holds below an error: 95 % of them below {_ninety_five(points.after_N)} as fitted, "
        f"{_ninety_five(points.cycle_out_N)} with the cycle left out, "
        f"{_ninety_five(points.level_out_N)} with the load left out."
    )
    found.append(picture(sizes, "left_out", "Errors on data left out", words, caption=words))
    return tuple(found)


def _largest(error_N: FloatArray) -> str:
    return f"{np.abs(error_N).max():.3g} N"


def _ninety_five(error_N: FloatArray) -> str:
    known = np.abs(error_N[np.isfinite(error_N)])
    return f"{np.quantile(known, 0.95):.3g} N" if len(known) else "not tested"


def trust_pictures(result: FitResult, points: HoldPoints) -> tuple[Picture, ...]:
    """Return U against force with the left-out errors in it."""
    curve = result.calibration.file.uncertainty.curve
    force_N, U_N = np.array([p.force_N for p in curve]), np.array([p.U_N for p in curve])
    figure = draw_uncertainty(new_figure(), force_N, U_N, points.level_out_N, points.load_N)
    known = np.isfinite(points.level_out_N)
    inside = np.abs(points.level_out_N[known]) <= np.interp(points.load_N[known], force_N, U_N)
    share = f"{100.0 * inside.mean():.0f} % of {inside.size} lie inside" if inside.size else "none could be left out"
    words = (
        f"U (k = 2) is {U_N[0]:.3g} N at zero and {U_N[-1]:.3g} N at {force_N[-1]:.0f} N; of left-out loads {share}."
    )
    return (picture(figure, "uncertainty", "Stated uncertainty and what was found", words, caption=words),)


def budget_picture(lines: Sequence[BudgetLine]) -> Picture:
    """Return the budget as bars."""
    figure = draw_budget(
        new_figure(left_mm=52.0), [line.source for line in lines], np.array([line.u_N for line in lines])
    )
    largest = max(lines, key=lambda line: line.u_N)
    words = f"Largest source: {largest.source}, {largest.u_N:.2g} N of standard uncertainty at the top load."
    return picture(figure, "budget", "Where the uncertainty comes from", words, caption=words)
