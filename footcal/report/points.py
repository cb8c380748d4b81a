"""What a finished fit says of each settled hold, as plain columns for plots and tables."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.fit.outcome import FitResult
from footcal.records import BoolArray, FloatArray
from footcal.sensor.model import POWERS


@dataclass(frozen=True, slots=True, eq=False)
class HoldPoints:
    """One entry a hold that was fitted, in order of time; all arrays have shape (holds,). Errors: reading less load."""

    load_N: FloatArray
    raw: FloatArray  # mean counts in the window
    temp_C: FloatArray  # NaN without a thermometer
    t_s: FloatArray  # since the start of the first session
    before_N: FloatArray  # error of curve and temperature alone: loop and creep still in it
    after_N: FloatArray  # error of the whole model
    cycle_out_N: FloatArray  # error of a fit that did not see this cycle; NaN where it was always seen
    level_out_N: FloatArray  # error of a fit that did not see this load; NaN where it was always seen
    cycle: FloatArray
    session: FloatArray
    direction: tuple[str, ...]  # zero, up, down
    kind: tuple[str, ...]  # press, hold, quick, …

    def of(self, *directions: str) -> BoolArray:
        """Return which holds have one of the directions, shape (holds,), bool."""
        return np.array([direction in directions for direction in self.direction], dtype=bool)

    def plain(self) -> BoolArray:
        """Return which holds are ordinary ones (no press, no quick lift), shape (holds,), bool."""
        return np.array([kind == "hold" for kind in self.kind], dtype=bool)


def hold_points(result: FitResult) -> HoldPoints:
    """Return the holds of a fit with their errors, newtons; holds set aside are not among them."""
    rows, fitted, data = result.rows, result.best.fitted, result.data
    full_N = data.capacity_N
    index = np.unique(rows.hold[~rows.pump])
    holds = [data.holds[i] for i in index]
    members = [np.flatnonzero(rows.hold == i) for i in index]

    def mean(values: FloatArray) -> FloatArray:
        return np.array([values[mine].mean() for mine in members])

    apparent = fitted.features[:, POWERS.start + 1]
    left = result.best.left_out
    session = np.array([data.session_of[i] for i in index])
    offsets_s = data.channel.offset_s[session.astype(np.int64)]
    return HoldPoints(
        load_N=mean(rows.target) * full_N,
        raw=mean(_window_means(data.channel.raw, result)),
        temp_C=mean(_window_means(data.channel.temp_C, result)),
        t_s=np.array([hold.t_start_s for hold in holds]) + offsets_s - float(data.channel.t_s[0]),
        before_N=mean(apparent - rows.target) * full_N,
        after_N=-mean(fitted.residual) * full_N,
        cycle_out_N=-mean(left.cycles) * full_N,
        level_out_N=-mean(left.loads) * full_N,
        cycle=np.array([float(hold.cycle) for hold in holds]),
        session=session.astype(np.float64),
        direction=tuple(hold.direction for hold in holds),
        kind=tuple(hold.kind for hold in holds),
    )


def _window_means(samples: FloatArray, result: FitResult) -> FloatArray:
    rows = result.rows
    return np.array([samples[a:b].mean() for a, b in zip(rows.start, rows.stop, strict=True)])
