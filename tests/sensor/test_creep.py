"""Creep states."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.sensor.creep import CREEP_TAU_S, creep_columns, lagged
from tests.reference import tables


def times(*, rate_Hz: float, lasts_s: float) -> np.ndarray:
    """Evenly spaced nanoseconds."""
    return np.rint(np.arange(0.0, lasts_s, 1.0 / rate_Hz) * 1e9).astype(np.int64)


def test_a_lag_has_risen_by_63_percent_after_one_time_constant() -> None:
    """Step response 1 - exp(-t / tau) at t = tau."""
    t_ns = times(rate_Hz=1000.0, lasts_s=2.0)
    step = np.where(t_ns > 0, 1.0, 0.0)

    value = lagged(t_ns, step, tau_s=0.5)[np.searchsorted(t_ns, 500_000_000)]

    # By hand: 1 - 1/e = 0.632 121; the step itself rises over one sample of 1 ms, hence abs=1e-3.
    assert value == pytest.approx(0.632121, abs=1e-3)


def test_a_ramp_is_followed_by_its_exact_response_at_any_rate() -> None:
    """The response to t is t - tau (1 - exp(-t / tau)): a first-order hold is exact for ramps."""
    tau_s = 0.3
    for rate_Hz in (10.0, 80.0, 1000.0):
        t_ns = times(rate_Hz=rate_Hz, lasts_s=2.0)
        t_s = t_ns * 1e-9
        closed_form = t_s - tau_s * (1.0 - np.exp(-t_s / tau_s))
        assert lagged(t_ns, t_s, tau_s) == pytest.approx(closed_form, abs=1e-12)


def test_the_creep_of_a_standard_linear_solid_is_reproduced() -> None:
    """Strain under a step of stress, from one lagged state, against the textbook's closed form (creep_sls.csv)."""
    rows = tables.rows("creep_sls.csv")
    t_table = np.array([float(row["t"]) for row in rows])
    expected = np.array([float(row["creep_strain"]) for row in rows])
    stress, e_inf, e_1 = 12.0, 100.0, 50.0
    t_s = np.unique(np.concatenate([np.linspace(0.0, 1800.0, 20_001), t_table]))
    step = np.full(len(t_s), stress)

    creep_state = stress - lagged(np.rint(t_s * 1e9).astype(np.int64) + 1, step, tau_s=15.0)
    # A lag that starts settled sees no step, so a zero is put before it: what remains is sigma exp(-t / 15).
    assert creep_state == pytest.approx(0.0, abs=1e-12)
    started = np.concatenate([[0.0], step])
    t_ns = np.concatenate([[0], np.rint(t_s * 1e9).astype(np.int64) + 1])
    remaining = (started - lagged(t_ns, started, tau_s=15.0))[1:]
    strain = stress / e_inf - (1.0 / e_inf - 1.0 / (e_inf + e_1)) * remaining

    # The table has 12 digits; the step takes 1 ns here.
    assert strain[np.searchsorted(t_s, t_table)] == pytest.approx(expected, abs=1e-9)


def test_creep_features_of_a_constant_are_zero() -> None:
    """A foot that never moves has nothing to creep from."""
    t_ns = times(rate_Hz=100.0, lasts_s=5.0)
    assert creep_columns(t_ns, np.full(len(t_ns), 0.4)) == pytest.approx(0.0, abs=1e-12)  # rounding of 500 steps


def test_a_gap_of_more_than_a_minute_starts_the_states_afresh() -> None:
    """After a gap the lags are taken as settled."""
    t_ns = np.array([0, 1_000_000, 100_000_000_000], dtype=np.int64)
    assert creep_columns(t_ns, np.array([0.0, 1.0, 0.5]))[2] == pytest.approx(0.0, abs=1e-15)


@given(st.lists(st.floats(-1.0, 1.0), min_size=2, max_size=30), st.sampled_from(CREEP_TAU_S))
def test_a_lag_never_leaves_the_range_of_its_input(values: list[float], tau_s: float) -> None:
    """A first-order lag is an average of the past."""
    v = np.array(values)
    t_ns = np.arange(len(v), dtype=np.int64) * 10_000_000
    y = lagged(t_ns, v, tau_s)
    assert y.min() >= v.min() - 1e-12
    assert y.max() <= v.max() + 1e-12
