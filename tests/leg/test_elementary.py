"""The step's own sines and exponentials against numpy's."""

from __future__ import annotations

import numpy as np
import pytest
from numba import njit

from footcal.leg.elementary import HALF_PI_HIGH, HALF_PI_LOW, cosine_of_rest, falling, sine_of_rest
from footcal.records import FloatArray
from tests.leg.robots import planar_leg, single
from tests.leg.ticks import run


@njit
def _table(r: FloatArray, y: FloatArray, out: FloatArray) -> None:
    for i in range(r.shape[0]):
        out[0, i] = sine_of_rest(r[i])
        out[1, i] = cosine_of_rest(r[i])
        out[2, i] = falling(y[i])


def test_polynomials_equal_the_librarys_functions() -> None:
    """Sine and cosine to the last digits within an eighth of a turn, the exponential to 1e-12."""
    r, y = np.linspace(-np.pi / 4, np.pi / 4, 2001), np.linspace(0.0, 59.0, 2001)
    out = np.empty((3, 2001))

    _table(r, y, out)

    assert out[0] == pytest.approx(np.sin(r), abs=3e-16)
    assert out[1] == pytest.approx(np.cos(r), abs=3e-16)
    assert out[2] == pytest.approx(np.exp(-y), abs=1e-12)


def test_quarter_turn_in_two_parts_is_exact() -> None:
    """The two parts of pi/2 add up to it, and the first has zeros at its end so that whole multiples are exact."""
    assert np.pi / 2 == HALF_PI_HIGH + HALF_PI_LOW
    assert (1000 * HALF_PI_HIGH) / 1000 == HALF_PI_HIGH


def test_angles_of_many_turns_are_right_in_every_quadrant() -> None:
    """The sensor axis of a leg turned by up to 50 turns is that of numpy's sine and cosine."""
    angles = np.linspace(-320.0, 320.0, 997)
    inputs = {"q_rad": np.stack([angles, 0 * angles], axis=1), "dq_rad_per_s": np.zeros((997, 2))}

    axis_B = run(single(planar_leg()), inputs, ticks=997)["axis_B"]

    # By hand: a turn by q about y takes z to (sin q, 0, cos q); 1e-13 is the rounding of an angle of 320 rad.
    assert axis_B == pytest.approx(np.stack([np.sin(angles), 0 * angles, np.cos(angles)], axis=1), abs=1e-13)
