"""Pictures of a walk: vertical force against truth, who stands when, and the probability of contact."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from footcal.records import BoolArray, FloatArray
from footcal.report.style import AMBER, DEEP, INK, PLUM, SHADE, TEXT_pt, dress, empty, legend
from footcal.report.thin import kept_of_curve

MOST_POINTS = 700  # of one curve


def draw_forces(
    figure: Figure, t_s: FloatArray, estimate_N: FloatArray, sd_N: FloatArray, truth_N: FloatArray, legs: Sequence[str]
) -> Figure:
    """Draw the vertical force of every leg with its band of two standard deviations, the truth dashed over it.

    Args:
        figure: empty.
        t_s: shape (n,), seconds.
        estimate_N: shape (n, legs), may hold NaN.
        sd_N: standard deviation of each, shape (n, legs).
        truth_N: shape (n, legs); all NaN where there is no truth.
        legs: names.
    """
    columns = 2 if len(legs) > 1 else 1
    panels = figure.subplots(-(-len(legs) // columns), columns, sharex=True, sharey=True, squeeze=False).ravel()
    for l, (axes, leg) in enumerate(zip(panels, legs, strict=False)):
        _force_panel(axes, t_s, estimate_N[:, l], sd_N[:, l], truth_N[:, l])
        axes.text(0.01, 0.97, leg, transform=axes.transAxes, va="top", fontsize=TEXT_pt, fontweight="bold", color=INK)
        last_row = l >= len(legs) - columns
        dress(axes, "time, s" if last_row else "", "fz, N" if l % columns == 0 else "")
    top_N = float(np.nanmax(np.concatenate([[1.0], estimate_N.ravel(), truth_N.ravel()])))
    panels[0].set_ylim(-0.12 * top_N, 1.2 * top_N)  # a spike of the band may leave the picture
    panels[0].margins(x=0.01)
    for axes in panels[len(legs) :]:
        axes.set_axis_off()
    legend(panels[0])
    return figure


def _force_panel(axes: Axes, t_s: FloatArray, estimate_N: FloatArray, sd_N: FloatArray, truth_N: FloatArray) -> None:
    if not np.isfinite(estimate_N).any():
        empty(axes, "no estimate")
        return
    kept = kept_of_curve(estimate_N, MOST_POINTS)
    low_N, high_N = estimate_N - 2.0 * sd_N, estimate_N + 2.0 * sd_N
    axes.fill_between(t_s[kept], low_N[kept], high_N[kept], color=SHADE, linewidth=0.0, label="±2 sigma")
    axes.plot(t_s[kept], estimate_N[kept], color=DEEP.colour, linewidth=1.2, label="estimate")
    true = kept_of_curve(truth_N, MOST_POINTS)
    axes.plot(t_s[true], truth_N[true], color=AMBER.colour, linestyle=(0, (3, 2)), linewidth=1.0, label="truth")


def draw_contacts(figure: Figure, t_s: FloatArray, contact: BoolArray, truth: BoolArray, legs: Sequence[str]) -> Figure:
    """Draw which leg stood when, estimate above truth, and mark where they differ.

    Args:
        figure: empty.
        t_s: shape (n,), seconds.
        contact: estimate, shape (n, legs).
        truth: shape (n, legs).
        legs: names.
    """
    axes = figure.subplots()
    for l in range(len(legs)):
        at = float(len(legs) - 1 - l)
        _bars(axes, t_s, contact[:, l], (at + 0.03, 0.3), DEEP.colour, "", "estimate" if l == 0 else None)
        _bars(axes, t_s, truth[:, l], (at - 0.33, 0.3), "white", "////", "truth" if l == 0 else None)
        wrong = contact[:, l] != truth[:, l]
        marks = t_s[wrong][:: max(1, int(wrong.sum()) // 200)]
        axes.plot(
            marks,
            np.full(len(marks), at + 0.41),
            linestyle="",
            marker="|",
            markersize=5,
            color=INK,
            label="differ" if l == 0 else None,
        )
    axes.set_yticks([float(len(legs) - 1 - l) for l in range(len(legs))], list(legs))
    axes.set_xlim(float(t_s[0]), float(t_s[-1]))
    axes.set_ylim(-0.5, len(legs) - 0.4)
    dress(axes, "time, s", "", grid="x")
    axes.tick_params(axis="y", length=0)
    legend(axes)
    return figure


def _bars(
    axes: Axes, t_s: FloatArray, on: BoolArray, band: tuple[float, float], fill: str, hatch: str, label: str | None
) -> None:
    edges = np.flatnonzero(np.diff(np.concatenate([[False], on, [False]]).astype(np.int8)))
    last = len(t_s) - 1
    spans = [(float(t_s[a]), float(t_s[min(b, last)] - t_s[a])) for a, b in edges.reshape(-1, 2)]
    axes.broken_barh(spans, band, facecolors=fill, edgecolor=INK, linewidth=0.5, hatch=hatch, label=label)


def draw_probability(
    figure: Figure, t_s: FloatArray, p_contact: FloatArray, contact: BoolArray, truth: BoolArray
) -> Figure:
    """Draw the probability of contact of one leg with the decision made from it, and the truth.

    Args:
        figure: empty.
        t_s: shape (n,), seconds.
        p_contact: 0 to 1, shape (n,).
        contact: decided, shape (n,).
        truth: shape (n,).
    """
    axes = figure.subplots()
    kept = kept_of_curve(p_contact, 2 * MOST_POINTS)
    axes.fill_between(t_s, 0.0, np.where(truth, 1.0, 0.0), step="post", color=SHADE, linewidth=0.0, label="truth")
    axes.plot(t_s[kept], p_contact[kept], color=DEEP.colour, linewidth=1.2, label="probability")
    axes.step(
        t_s, 1.06 * contact, where="post", color=PLUM.colour, linestyle=(0, (4, 2)), linewidth=1.1, label="decided"
    )
    axes.set_ylim(-0.04, 1.12)
    axes.margins(x=0.01)
    dress(axes, "time, s", "contact")
    legend(axes)
    return figure
