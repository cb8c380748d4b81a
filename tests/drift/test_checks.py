"""A check session held against the calibration."""

from __future__ import annotations

import math

import numpy as np
import pytest

from footcal.drift.checks import en_number, line_of_deviation, score_check
from footcal.errors import SessionError
from tests.drift.stand_in import LineCalibration, check_session


def test_e_n_is_deviation_over_the_combined_expanded_uncertainty() -> None:
    """By hand: U_cal = 2 * 0.3, U_check = 2 * 0.4, so E_n = 1.5 / sqrt(0.6² + 0.8²) = 1.5."""
    assert en_number(1.5, 0.3, 0.4) == pytest.approx(1.5, rel=1e-12)


def test_e_n_without_any_uncertainty_is_infinite_or_zero() -> None:
    """A sure deviation is infinitely far; no deviation is none."""
    assert en_number(-0.1, 0.0, 0.0) == -math.inf
    assert en_number(0.0, 0.0, 0.0) == 0.0


def test_a_foot_that_has_not_moved_shows_no_shift() -> None:
    """Zero, span and every deviation are 0 where the reading is the load."""
    score = score_check(check_session(), LineCalibration())
    assert score.zero_N == pytest.approx(0.0, abs=1e-9)  # rounding of counts / 100
    assert score.span_pct == pytest.approx(0.0, abs=1e-9)
    assert max(abs(load.en) for load in score.loads) < 1e-9


def test_zero_and_span_are_found_as_put_in() -> None:
    """A foot that reads 2 N more and 1 % more shows just that."""
    score = score_check(check_session(zero_N=2.0, span_pct=1.0), LineCalibration())
    assert score.zero_N == pytest.approx(2.0, abs=1e-9)
    assert score.span_pct == pytest.approx(1.0, abs=1e-9)


def test_each_load_has_its_deviation_and_e_n() -> None:
    """By hand: 1 % of 400 N is 4 N; u_cal 0.5 N and an exact load give E_n = 4 / (2 * 0.5) = 4."""
    loads = score_check(check_session(span_pct=1.0), LineCalibration()).loads
    assert loads[3].deviation_N == pytest.approx(4.0, abs=1e-9)
    assert loads[3].en == pytest.approx(4.0, abs=1e-9)


def test_the_line_agrees_with_numpy() -> None:
    """numpy.polyfit with weights 1/sd and unscaled covariance is the same estimate; chi²/dof stays below 1."""
    load_N, deviation_N = np.array([0.0, 100.0, 300.0, 500.0]), np.array([0.1, 0.0, 0.2, 0.15])
    sd_N = np.array([0.2, 0.2, 0.3, 0.5])
    zero_N, span_pct, cov = line_of_deviation(load_N, deviation_N, sd_N)
    (slope, intercept), expected = np.polyfit(load_N, deviation_N, 1, w=1 / sd_N, cov="unscaled")
    assert (zero_N, span_pct / 100) == pytest.approx((intercept, slope), rel=1e-9)
    assert cov[0, 0] == pytest.approx(expected[1, 1], rel=1e-9)
    assert cov[1, 1] / 1e4 == pytest.approx(expected[0, 0], rel=1e-9)
    assert cov[0, 1] / 1e2 == pytest.approx(expected[0, 1], rel=1e-9)


def test_loads_that_scatter_more_than_stated_widen_the_uncertainty() -> None:
    """With sd a tenth of it, chi²/dof is 100 times as large and the covariance is that of the true scatter again."""
    load_N, deviation_N = np.array([0.0, 100.0, 200.0, 300.0]), np.array([1.0, -1.0, 1.0, -1.0])
    wide, narrow = (line_of_deviation(load_N, deviation_N, np.full(4, sd))[2] for sd in (0.1, 0.01))
    np.testing.assert_allclose(narrow, wide, rtol=1e-9)


def test_the_loop_is_the_gap_between_unloading_and_loading() -> None:
    """Unloading reads 3 N more at 100 N and 200 N."""
    assert score_check(check_session(loop_N=3.0), LineCalibration()).loop_N == pytest.approx(3.0, abs=1e-9)


def test_without_unloading_there_is_no_loop() -> None:
    """It is unknown, not 0."""
    session = check_session(loads_N=(0.0, 100.0, 200.0))
    assert math.isnan(score_check(session, LineCalibration()).loop_N)


def test_noise_is_the_scatter_of_single_readings() -> None:
    """White noise of 0.2 N is found; tolerance: 275 readings a hold, 7 holds, give about 3 %."""
    assert score_check(check_session(noise_N=0.2), LineCalibration()).noise_N == pytest.approx(0.2, rel=0.12)


def test_a_reading_that_still_creeps_is_less_certain() -> None:
    """A ramp inside the window of the first load makes its u_check larger, the others stay exact."""
    session = check_session()
    session.raw[500:1000] += np.linspace(0.0, 100.0, 500)  # 1 N over 10 s at 100 N
    loads = score_check(session, LineCalibration()).loads
    # By hand: the halves of a 5.5 s window differ by 0.275 N; rectangular: 0.275 / (2 sqrt 3) = 0.0794 N.
    assert loads[1].u_check_N == pytest.approx(0.0794, rel=0.02)  # the window holds whole samples only
    assert loads[2].u_check_N == pytest.approx(0.0, abs=1e-9)


def test_presses_and_quick_steps_are_not_scored() -> None:
    """Only steps of kind hold count."""
    kinds = ["hold", "press", "hold", "hold", "hold", "hold", "quick"]
    assert [load.step for load in score_check(check_session(kinds=kinds), LineCalibration()).loads] == [1, 3, 4, 5, 6]


def test_a_session_of_another_foot_is_refused() -> None:
    """Both feet are named."""
    with pytest.raises(SessionError, match=r"SP-9.*LC-1"):
        score_check(check_session(foot_id="SP-9"), LineCalibration())


def test_a_session_that_names_no_foot_is_refused() -> None:
    """The foot is the only key."""
    with pytest.raises(SessionError, match="--foot"):
        score_check(check_session(foot_id=None), LineCalibration())


@pytest.mark.parametrize("loads_N", [(0.0, 100.0), (100.0, 200.0)])
def test_too_few_loads_are_refused(loads_N: tuple[float, ...]) -> None:
    """One load only, or no zero."""
    with pytest.raises(SessionError, match="load"):
        score_check(check_session(loads_N=loads_N), LineCalibration())
