"""Tests of the simulated transducers."""

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.sim.transduction import GRID, Bridge, Capacitor, Divider, Magnet, bottoming, departure

CURVES = (
    Bridge(0.001, 0.2, 0.2, 0.08),
    Divider(4.0, 0.9, 0.01),
    Magnet(0.15, 0.8),
    Capacitor(0.4, 0.3),
)


@pytest.mark.parametrize("curve", [CURVES[0], *CURVES[2:]], ids=lambda curve: type(curve).__name__)
def test_signal_goes_from_none_to_one(curve: Bridge | Magnet | Capacitor) -> None:
    """No strain: no signal; full strain: 1."""
    assert curve.signal(np.array([0.0, 1.0])) == pytest.approx([0.0, 1.0], abs=1e-12)


@pytest.mark.parametrize("curve", CURVES, ids=lambda curve: type(curve).__name__)
def test_signal_rises_all_the_way(curve: Bridge | Divider | Magnet | Capacitor) -> None:
    """More strain is more signal, from well below zero to the stop of a pad (a flat dead band may stand still)."""
    assert (np.diff(curve.signal(np.linspace(0.0, 1.3, 500))) > -1e-15).all()


@pytest.mark.parametrize(
    ("curve", "asked"), [(CURVES[0], -0.002), (CURVES[1], 0.39), (CURVES[2], -0.03), (CURVES[3], -0.08)]
)
def test_a_curve_bends_as_asked(curve: Bridge | Divider | Magnet | Capacitor, asked: float) -> None:
    """After `solve`, the largest departure from the line through both ends is the asked one, sign included."""
    bent = curve.solve(asked)
    off = bent.signal(GRID)
    line = off[0] + (off[-1] - off[0]) * GRID
    largest = (off - line)[np.argmax(np.abs(off - line))] / (off[-1] - off[0])
    assert largest == pytest.approx(asked, rel=1e-6)


def test_a_linear_film_bends_the_divider_as_worked_out_by_hand() -> None:
    """With R ~ 1/F and g = 3, the departure of x(1 + g)/(1 + g x) is (√(1+g) − 1)/(√(1+g) + 1) = 1/3."""
    film = Divider(conductance=3.0, power=1.0, dead_band=0.0, leak=0.0, edge=1e-9)
    assert departure(film, GRID) == pytest.approx(1.0 / 3.0, abs=1e-5)


def test_a_dead_band_hides_small_loads() -> None:
    """Within a dead band of 1 % the divider gives less than a twentieth of what it gives 1 % beyond it."""
    film = Divider(4.0, 0.9, 0.01)
    rest, within, beyond = film.signal(np.array([0.0, 0.003, 0.02]))
    assert within - rest < (beyond - rest) / 20.0


def test_a_pad_runs_into_its_stop() -> None:
    """Strain is untouched up to 1.1 and never goes beyond 1.4."""
    assert bottoming(np.array([0.5, 1.1])) == pytest.approx([0.5, 1.1])
    assert bottoming(np.array([10.0]))[0] == pytest.approx(1.4)


def test_a_bend_that_cannot_be_had_is_refused() -> None:
    """A divider cannot bow downwards; the message names what was asked."""
    with pytest.raises(SettingError, match="nonlinearity"):
        CURVES[1].solve(-0.3)
