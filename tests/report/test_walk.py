"""Pictures of a walk."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.report.style import new_figure
from footcal.report.walk import draw_contacts, draw_forces, draw_probability

LEGS = ("front_left", "front_right")


def test_band_is_two_standard_deviations() -> None:
    """Around 50 N with a standard deviation of 3 N the band goes from 44 to 56 N (by hand)."""
    t_s = np.arange(5.0)
    force_N, sd_N = np.full((5, 2), 50.0), np.full((5, 2), 3.0)

    figure = draw_forces(new_figure(), t_s, force_N, sd_N, force_N, LEGS)

    band = figure.axes[0].collections[0].get_paths()[0].vertices
    assert (band[:, 1].min(), band[:, 1].max()) == pytest.approx((44.0, 56.0))


def test_leg_without_estimate_or_truth_says_so() -> None:
    """A dead leg's panel says that there is no estimate; missing truth draws nothing and warns of nothing."""
    t_s, nothing = np.arange(5.0), np.full((5, 2), np.nan)
    force_N = nothing.copy()
    force_N[:, 0] = 50.0

    figure = draw_forces(new_figure(), t_s, force_N, nothing, nothing, LEGS)

    assert "no estimate" in [text.get_text() for text in figure.axes[1].texts]


def test_contact_bars_start_and_end_with_contact() -> None:
    """Contact from 2 s to 5 s is one bar of 3 s (by hand)."""
    t_s = np.arange(10.0)
    contact = ((t_s >= 2.0) & (t_s < 5.0))[:, None]

    figure = draw_contacts(new_figure(), t_s, contact, contact, ("front_left",))

    bar = figure.axes[0].collections[0].get_paths()[0].vertices
    assert (bar[:, 0].min(), bar[:, 0].max()) == pytest.approx((2.0, 5.0))
    assert all(len(np.asarray(line.get_xdata())) == 0 for line in figure.axes[0].lines)  # nothing differs


def test_probability_is_drawn_as_given() -> None:
    """The curve of the probability is the probability."""
    t_s = np.linspace(0.0, 1.0, 11)
    p = np.linspace(0.0, 1.0, 11)

    figure = draw_probability(new_figure(), t_s, p, p > 0.9, p > 0.5)

    assert np.asarray(figure.axes[0].lines[0].get_ydata()).tolist() == p.tolist()
