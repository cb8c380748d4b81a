"""The scikit-learn regressor: its library's own checks, the plain polynomial as special case, and memory that pays."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from sklearn.model_selection import GridSearchCV, TimeSeriesSplit
from sklearn.pipeline import make_pipeline
from sklearn.preprocessing import FunctionTransformer
from sklearn.utils.estimator_checks import check_estimator

from footcal import ForceModel
from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor

BY_NATURE = {
    "check_methods_sample_order_invariance": "a sensor with hysteresis and creep has a memory: order is information",
    "check_methods_subset_invariance": "what came before a sample changes what it means, so a part is not the whole",
}


@cache
def stepped() -> tuple[FloatArray, FloatArray]:
    """A magnetic pad over three up and down cycles, means of twenty samples: columns t_s, raw, and the true force."""
    rng = np.random.default_rng(107)
    session = run_session(draw_sensor("Q", rng), rng, parts=("cycles",))
    count = len(session.force_N) // 20 * 20
    t_s, raw, force_N = (
        values[:count].reshape(-1, 20).mean(axis=1)
        for values in (session.readings["t_s"], session.readings["raw"], session.force_N)
    )
    return np.column_stack([t_s, raw]), force_N


def test_the_library_s_checks_hold_but_for_the_two_that_a_memory_breaks() -> None:
    """scikit-learn's check_estimator; the two declared failures are there and have a reason."""
    results = check_estimator(ForceModel(), expected_failed_checks=BY_NATURE, on_skip=None)
    failed = {one["check_name"] for one in results if one["status"] in {"failed", "xfail"}}
    assert failed == set(BY_NATURE)


def test_without_memory_every_check_of_the_library_holds() -> None:
    """The plain polynomial needs no exception."""
    results = check_estimator(ForceModel(hysteresis=False, creep=False), on_skip=None)
    assert {one["status"] for one in results} <= {"passed", "skipped"}


def test_without_memory_and_temperature_it_is_the_least_squares_polynomial() -> None:
    """numpy.polynomial's least squares on noisy points, to 1e-9 of full scale."""
    rng = np.random.default_rng(7)
    raw = rng.uniform(1000.0, 60000.0, 80)
    force_N = 300.0 * (raw / 60000.0) ** 1.3 + rng.normal(0.0, 2.0, 80)
    plain = np.polynomial.Polynomial.fit(raw, force_N, 3)
    model = ForceModel(hysteresis=False, creep=False, degree=3).fit(raw[:, None], force_N)
    at = np.linspace(1000.0, 60000.0, 50)
    assert model.predict(at[:, None]) == pytest.approx(plain(at), abs=3e-7)


def test_a_column_beyond_those_named_gets_a_straight_line() -> None:
    """Force = 2 raw + 3 other + 1 exactly (by hand)."""
    rng = np.random.default_rng(7)
    columns = rng.uniform(0.0, 10.0, (40, 2))
    force_N = 2.0 * columns[:, 0] + 3.0 * columns[:, 1] + 1.0
    model = ForceModel(hysteresis=False, creep=False, degree=1).fit(columns, force_N)
    assert model.predict(columns) == pytest.approx(force_N, abs=1e-9)


def test_memory_takes_three_quarters_off_the_error_of_a_pad() -> None:
    """Fitted on two cycles, scored on the third; a 6 % loop is there to be undone (the simulator's physics)."""
    columns, force_N = stepped()
    seen = 2 * len(force_N) // 3
    error = {}
    for memory in (False, True):
        model = ForceModel("magnetic", degree=4, hysteresis=memory, creep=memory, columns=("t_s", "raw"))
        model.fit(columns[:seen], force_N[:seen])
        error[memory] = np.sqrt(np.mean((model.predict(columns) - force_N)[seen:] ** 2))
    assert error[True] < 0.25 * error[False]


def test_it_goes_through_a_pipeline_and_a_grid_search() -> None:
    """Degree chosen by folds in order of time: force goes with the square of the reading (by hand)."""
    rng = np.random.default_rng(7)
    columns = rng.uniform(0.0, 10.0, (80, 1))
    force_N = columns[:, 0] ** 2 + rng.normal(0.0, 0.5, 80)
    model = ForceModel(hysteresis=False, creep=False)
    search = GridSearchCV(
        make_pipeline(FunctionTransformer(), model), {"forcemodel__degree": [1, 2]}, cv=TimeSeriesSplit(3)
    ).fit(columns, force_N)
    assert search.best_params_ == {"forcemodel__degree": 2}


def test_temperature_is_learned_from_its_column() -> None:
    """Zero moves by 0.5 N a degree and span by 0.1 % a degree (by hand); read back to 0.1 N."""
    rng = np.random.default_rng(7)
    temp_C, force_N = rng.uniform(8.0, 38.0, 300), rng.uniform(0.0, 100.0, 300)
    raw = 10.0 * (force_N * (1.0 + 0.001 * (temp_C - 22.0)) + 0.5 * (temp_C - 22.0))
    model = ForceModel(columns=("raw", "temp_C"), temperature=True, hysteresis=False, creep=False)
    found = model.fit(np.column_stack([raw, temp_C]), force_N).predict(np.column_stack([raw, temp_C]))
    assert np.max(np.abs(found - force_N)) < 0.1


def test_times_that_run_backwards_are_refused() -> None:
    """Memory needs order; the row is named."""
    columns, force_N = stepped()
    with pytest.raises(ValueError, match="sort the rows by t_s"):
        ForceModel(columns=("t_s", "raw")).fit(columns[::-1], force_N)


@pytest.mark.parametrize(
    "settings",
    [
        {"kind": "spring"},
        {"degree": 6},
        {"columns": ("t_s",)},
        {"columns": ("raw", "raw")},
        {"temperature": True},
        {"interval_s": 0.0},
        {"capacity_N": -1.0},
        {"power": 0.0},
    ],
)
def test_a_setting_out_of_range_is_refused_by_fit(settings: dict[str, object]) -> None:
    """The constructor only keeps settings, as scikit-learn asks; `fit` checks them."""
    with pytest.raises(SettingError, match="ForceModel"):
        ForceModel(**settings).fit(np.arange(10.0)[:, None], np.arange(10.0))
