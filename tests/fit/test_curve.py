"""The plain curve against certified and published answers (tests/reference, each with its source)."""

from __future__ import annotations

import tomllib
from pathlib import Path

import numpy as np
import pytest
from sklearn.linear_model import LinearRegression

from footcal.errors import FitRefusedError
from footcal.fit.curve import curve
from tests.reference import tables

REFERENCE = Path(__file__).parents[1] / "reference"
CERTIFIED = tomllib.loads((REFERENCE / "strd_certified.toml").read_text(encoding="utf-8"))
REGRESSION = tomllib.loads((REFERENCE / "regression_cases.toml").read_text(encoding="utf-8"))


def digits(found: np.ndarray, certified: list[float]) -> float:
    """Correct significant digits of the worst value: -log10 of the relative error (16 where it is zero)."""
    error = np.max(np.abs(found - certified) / np.abs(certified))
    return 16.0 if error == 0.0 else float(-np.log10(error))


def column(name: str, key: str) -> np.ndarray:
    """One column of a reference table."""
    return np.array([float(row[key]) for row in tables.rows(name)])


def test_pontius_coefficients_have_ten_certified_digits() -> None:
    """NIST StRD Pontius: 40 real load-cell readings, quadratic."""
    found, _ = curve(column("strd_pontius.csv", "load"), column("strd_pontius.csv", "deflection"), 2)
    assert digits(found, CERTIFIED["Pontius"]["b"]) >= 10.0


def test_pontius_standard_deviations_have_ten_certified_digits() -> None:
    """NIST StRD Pontius: standard deviations of the coefficients."""
    _, covariance = curve(column("strd_pontius.csv", "load"), column("strd_pontius.csv", "deflection"), 2)
    assert digits(np.sqrt(np.diag(covariance)), CERTIFIED["Pontius"]["sd_b"]) >= 10.0


@pytest.mark.parametrize("number", [1, 2, 3, 4, 5])
def test_wampler_meets_the_digits_a_sound_fit_must_reach(number: int) -> None:
    """NIST StRD Wampler1..5, degree 5: 8, 9, 8, 7, 5 digits."""
    found, _ = curve(column("strd_wampler.csv", "x"), column("strd_wampler.csv", f"y{number}"), 5)
    case = CERTIFIED[f"Wampler{number}"]
    assert digits(found, case["b"]) >= case["min_correct_digits"]


@pytest.mark.parametrize("name", ["NoInt1", "NoInt2"])
def test_a_line_through_zero_has_thirteen_certified_digits(name: str) -> None:
    """NIST StRD NoInt1 and NoInt2, slope and its standard deviation."""
    rows = [row for row in tables.rows("strd_noint.csv") if row["set"] == name]
    x, y = (np.array([float(row[key]) for row in rows]) for key in ("x", "y"))
    found, covariance = curve(x, y, 1, intercept=False)
    assert digits(found, CERTIFIED[name]["b"]) >= 13.0
    assert digits(np.sqrt(np.diag(covariance)), CERTIFIED[name]["sd_b"]) >= 13.0


def test_the_handbook_load_cell_set_gives_the_printed_quadratic() -> None:
    """e-Handbook 2.3.6.5, 33 readings; figures recomputed to the digits given."""
    case = REGRESSION["ehb_loadcell_33"]
    found, covariance = curve(column("ehb_loadcell_33.csv", "load"), column("ehb_loadcell_33.csv", "response"), 2)
    assert found == pytest.approx(case["b_computed"], rel=1e-8)
    assert np.sqrt(np.diag(covariance)) == pytest.approx(case["sd_b_computed"], rel=1e-4)


def test_the_thermometer_line_of_the_gum_has_its_printed_answers() -> None:
    """GUM (JCGM 100:2008) H.3: intercept, slope, their standard uncertainties and correlation."""
    case = REGRESSION["gum_h3"]
    found, covariance = curve(np.array(case["t"]) - case["t0"], case["b"], 1)
    u = np.sqrt(np.diag(covariance))
    assert round(found[0], 4) == case["y1_published"]
    assert round(found[1], 5) == case["y2_published"]
    assert round(u[0], 4) == case["u_y1_published"]
    assert round(u[1], 5) == case["u_y2_published"]
    assert round(covariance[0, 1] / (u[0] * u[1]), 3) == case["r_published"]


def test_the_prediction_at_30_degrees_has_its_printed_uncertainty() -> None:
    """GUM H.3.4: b(30) = -0.1494 with u = 0.0041."""
    case = REGRESSION["gum_h3"]
    found, covariance = curve(np.array(case["t"]) - case["t0"], case["b"], 1)
    at_30 = np.array([1.0, 30.0 - case["t0"]])
    assert round(float(at_30 @ found), 4) == case["b30_published"]
    assert round(float(np.sqrt(at_30 @ covariance @ at_30)), 4) == case["u_b30_published"]


def test_a_line_agrees_with_scikit_learn() -> None:
    """The general-purpose library on random data."""
    rng = np.random.default_rng(7)
    x = rng.normal(size=50)
    y = 3.0 + 2.0 * x + rng.normal(size=50)
    oracle = LinearRegression().fit(x[:, None], y)
    assert curve(x, y, 1)[0] == pytest.approx([oracle.intercept_, oracle.coef_[0]], rel=1e-12)


@pytest.mark.parametrize(
    ("x", "y", "what"),
    [
        ([1.0, 2.0], [1.0], "shapes"),
        ([1.0, np.nan, 3.0], [1.0, 2.0, 3.0], "not finite"),
        ([1.0, 2.0], [1.0, 2.0], "can't be found from 2 points"),
        ([2.0, 2.0, 2.0, 2.0], [1.0, 2.0, 3.0, 4.0], "can't tell the coefficients apart"),
    ],
)
def test_points_that_give_no_curve_are_refused(x: list[float], y: list[float], what: str) -> None:
    """Each refusal says what is wrong."""
    with pytest.raises(FitRefusedError, match=what):
        curve(x, y, 2)
