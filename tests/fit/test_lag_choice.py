"""How much of a stated lag is undone."""

from __future__ import annotations

from functools import cache

import numpy as np

from footcal.fit.engine import fit_sessions
from footcal.fit.outcome import FitResult
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session


@cache
def fitted(kind: str) -> FitResult:
    """A foot with its stated lag."""
    rng = np.random.default_rng(140)
    return fit_sessions([as_session(run_session(draw_sensor(kind, rng), rng, parts=("cycles", "quick")))])


def test_a_quiet_cell_has_its_lag_undone() -> None:
    """Noise of some 0.005 % of full scale is no reason to be late."""
    result = fitted("A")
    assert result.outcome.lag_s == result.data.lag_s > 0.0


def test_a_noisy_pad_keeps_a_part_of_its_lag() -> None:
    """A resistive pad's noise at the top would grow by more than the lag costs."""
    result = fitted("P")
    assert result.outcome.lag_s < result.data.lag_s
