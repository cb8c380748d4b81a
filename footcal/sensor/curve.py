"""The base curve: a polynomial in the normalised reading, as apparent force over full scale.

Law: v = b_0 + b_1 x + ... + b_5 x^5, evaluated by Horner's scheme. Degree 3 serves cells, 4 to 5 pads.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

N_POWERS: Final = 6  # constant to fifth power


@njit(error_model="numpy")
def quintic(x: float, b0: float, b1: float, b2: float, b3: float, b4: float, b5: float) -> float:
    """Return the polynomial at x; unused powers have coefficient 0."""
    return b0 + x * (b1 + x * (b2 + x * (b3 + x * (b4 + x * b5))))


@njit(error_model="numpy")
def quintic_slope(x: float, b1: float, b2: float, b3: float, b4: float, b5: float) -> float:
    """Return the derivative of the polynomial at x."""
    return b1 + x * (2.0 * b2 + x * (3.0 * b3 + x * (4.0 * b4 + x * 5.0 * b5)))


def power_columns(x: FloatArray) -> FloatArray:
    """Return the columns 1, x, ..., x^5, shape (n, 6)."""
    return np.vander(np.asarray(x, dtype=np.float64), N_POWERS, increasing=True)
