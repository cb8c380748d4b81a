"""Control charts against the cases of the NIST/SEMATECH e-Handbook of Statistical Methods."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.drift.charts import check_standard, ewma, individuals, run_start
from footcal.errors import SettingError

# NIST/SEMATECH e-Handbook 6.3.2.2, 10 batches.
BATCHES = np.array([49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1])
# NIST/SEMATECH e-Handbook 6.3.2.4, 20 values with the averages as printed.
VALUES = np.array(
    [
        *(52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5),
        *(49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1),
    ]
)
AVERAGES = np.array(
    [
        *(50.60, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33),
        *(50.11, 49.36, 49.52, 50.05, 49.38, 49.92, 50.73, 51.23, 51.94, 51.99),
    ]
)
# NIST/SEMATECH e-Handbook 2.3.7.1: low, middle, upper check standard, read on six days.
STANDARDS = np.tile([0.76, 3.29, 8.89], (6, 1))
READ = np.array(
    [
        [1.12, 3.49, 9.11],
        [0.99, 3.53, 8.89],
        [1.05, 3.46, 9.02],
        [0.76, 3.75, 9.30],
        [0.96, 3.53, 9.05],
        [1.03, 3.52, 9.02],
    ]
)
# Line through the 40 calibration pairs of 2.3.6.7.3, computed with an independent least-squares fit.
LINE = {"intercept": 0.23576229, "slope": 0.98703771, "residual_sd": 0.06203196, "dof": 38}


def test_individuals_chart_gives_the_printed_limits() -> None:
    """e-Handbook 6.3.2.2: mean 50.81, limits 55.8041 and 45.8159, nothing out of control."""
    chart = individuals(BATCHES)
    assert chart.centre == pytest.approx(50.81, abs=5e-5)
    assert (chart.upper[0], chart.lower[0]) == pytest.approx((55.8041, 45.8159), abs=5e-5)  # as printed
    assert not chart.out.any()


def test_a_base_period_sets_the_limits() -> None:
    """By hand: 0, 1, 0, 1 has mean 0.5 and mean moving range 1, limits 0.5 ± 3/1.128; 4 is outside."""
    chart = individuals(np.array([0.0, 1.0, 0.0, 1.0, 4.0]), base=4)
    assert chart.upper[0] == pytest.approx(0.5 + 3 / 1.128, rel=1e-12)
    assert chart.out.tolist() == [False, False, False, False, True]


def test_one_value_makes_no_chart() -> None:
    """A moving range needs two."""
    with pytest.raises(SettingError, match="2 are needed"):
        individuals(np.array([1.0]))


def test_ewma_follows_the_printed_averages() -> None:
    """e-Handbook 6.3.2.4, weight 0.3 from 50: all 20 averages, printed to two decimals."""
    assert ewma(VALUES, sd=2.0539, start=50.0).value == pytest.approx(AVERAGES, abs=0.00501)


def test_ewma_limits_are_the_printed_ones() -> None:
    """e-Handbook 6.3.2.4: 52.5884 and 47.4115; they carry a rounded factor, hence 2e-4."""
    chart = ewma(VALUES, sd=2.0539, start=50.0, settled=True)
    assert (chart.upper[0], chart.lower[0]) == pytest.approx((52.5884, 47.4115), abs=2e-4)
    assert not chart.out.any()


def test_ewma_limits_start_narrow() -> None:
    """By hand, t = 1: w/(2 − w)·(1 − (1 − w)²) = w², so the first limit is 3 sd w = 0.9 for w = 0.3, sd = 1."""
    assert ewma(np.zeros(3), sd=1.0).upper[0] == pytest.approx(0.9, rel=1e-12)


@pytest.mark.parametrize(("sd", "weight"), [(0.0, 0.3), (1.0, 0.0), (1.0, 1.1), (float("nan"), 0.3)])
def test_ewma_settings_out_of_range_are_refused(sd: float, weight: float) -> None:
    """Spread and weight must be above 0."""
    with pytest.raises(SettingError, match="EWMA"):
        ewma(np.zeros(3), sd=sd, weight=weight)


def test_check_standards_show_day_four_out_of_control() -> None:
    """e-Handbook 2.3.7.1: W of each standard and day (computed from the data, 3 decimals), and day 4 outside."""
    chart = check_standard(STANDARDS, READ, **LINE)
    low, middle, upper = chart.value.reshape(6, 3).T
    assert low == pytest.approx([0.136, 0.004, 0.065, -0.229, -0.026, 0.045], abs=6e-4)
    assert middle == pytest.approx([0.007, 0.047, -0.023, 0.270, 0.047, 0.037], abs=6e-4)
    assert upper == pytest.approx([0.101, -0.122, 0.010, 0.293, 0.040, 0.010], abs=6e-4)
    assert chart.out.reshape(6, 3).any(axis=1).tolist() == [False, False, False, True, False, False]


def test_the_check_standards_limit_is_t_times_sd_over_slope() -> None:
    """Limit 0.1569641: t of 38 degrees of freedom, two-sided at 1 − 0.95^(1/3), is 2.497575 (independent library)."""
    assert check_standard(STANDARDS, READ, **LINE).upper[0] == pytest.approx(0.1569641, abs=1e-6)


@pytest.mark.parametrize(
    ("out", "start"), [([], None), ([1, 1, 0], None), ([1, 0, 1, 1], 2), ([1, 1], 0), ([0, 0, 1], 2)]
)
def test_the_run_that_lasts_to_the_end_is_found(out: list[int], start: int | None) -> None:
    """A run that has ended does not count."""
    assert run_start(np.array(out, dtype=bool)) == start
