"""How much of a sensor's stated lag to undo: as much as removes more error than the noise it adds.

Undoing a first-order lag on a 1 kHz channel amplifies noise (see sensor/lag.py). Leaving a part t of it in costs t
times the rate of change of the force. The best lead balances the two for the rate of change of walking, whose root mean
square over stance, impacts included, is some eight full scales a second (from simulated walks).
"""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.fit.channel import Channel
from footcal.fit.passes import Fitted
from footcal.fit.rows import Rows
from footcal.sensor.lag import noise_gain
from footcal.sensor.model import PLAYS, PLAYS_BY_LOAD, POWERS

WALK_RATE_per_s: Final = 8.0  # of full scale
CHANNEL_s: Final = 0.001
STEPS: Final = 21


def lag_to_undo_s(lag_s: float, channel: Channel, fitted: Fitted, rows: Rows) -> float:
    """Return the lag that the compensator shall undo, between 0 and the stated one, seconds."""
    noise = walking_noise(channel, fitted, rows)
    leads = np.linspace(0.0, lag_s, STEPS)
    cost = [((lag_s - lead) * WALK_RATE_per_s) ** 2 + (noise * noise_gain(lead, CHANNEL_s)) ** 2 for lead in leads]
    return float(leads[int(np.argmin(cost))])


def walking_noise(channel: Channel, fitted: Fitted, rows: Rows) -> float:
    """Return the noise of one 1 kHz sample under load, share of full scale, as the model passes it on.

    White noise of the bench samples, scaled to the faster channel, times the model's slope for a small wiggle (plays
    stuck, creep left behind); median over the loaded rows.
    """
    loaded = np.flatnonzero(~rows.pump & (rows.target > 0.3 * rows.target.max()) & (rows.stop - rows.start > 4))
    if len(loaded) == 0:
        return 0.0
    rate = np.sqrt(float(np.median(np.diff(channel.t_s))) / CHANNEL_s)
    slopes = small_slope(fitted, rows.target[loaded])
    found = [
        np.median(np.abs(np.diff(fitted.apparent[a:b]))) / 0.6745 / np.sqrt(2.0)
        for a, b in zip(rows.start[loaded], rows.stop[loaded], strict=True)
    ]
    return float(np.median(np.array(found) * slopes) * rate)


def small_slope(fitted: Fitted, v: np.ndarray) -> np.ndarray:
    """Return the model's slope for a wiggle too small to move a play, at each apparent force, shape (n,)."""
    a, w, by_load = (fitted.coefficients[part] for part in (POWERS, PLAYS, PLAYS_BY_LOAD))
    curve = sum(j * a[j] * v ** (j - 1) for j in range(1, len(a)))
    return np.asarray(curve - w.sum() - by_load.sum() * v)
