"""The one solver, and leaving groups out by merged factors."""

from __future__ import annotations

import numpy as np
import pytest
from sklearn.linear_model import HuberRegressor, Ridge

from footcal.fit.least_squares import solve, solve_triangles, solve_without_each, triangle
from footcal.fit.robust import HUBER_K, huber_weights, robust_sd


def data(n: int = 60, k: int = 4) -> tuple[np.ndarray, np.ndarray]:
    """A random design and target."""
    rng = np.random.default_rng(7)
    design = rng.normal(size=(n, k))
    return design, design @ np.arange(1.0, k + 1.0) + 0.1 * rng.normal(size=n)


def test_leaving_a_group_out_by_factors_equals_refitting_without_it() -> None:
    """The merged triangles against a plain fit of the remaining rows."""
    design, target = data()
    groups = [slice(0, 20), slice(20, 40), slice(40, 60)]
    factors = [triangle(design[group], target[group]) for group in groups]
    merged = solve_triangles([factors[0], factors[2]])
    rest = np.r_[0:20, 40:60]
    plain = np.linalg.lstsq(design[rest], target[rest], rcond=None)[0]
    assert merged == pytest.approx(plain, rel=1e-11)


def test_leaving_each_group_out_in_turn_equals_refitting_each_time() -> None:
    """Merging from both ends against a plain fit of the remaining rows, priors kept in."""
    design, target = data()
    prior = 0.5 * np.eye(4)
    groups = [slice(0, 10), slice(10, 30), slice(30, 60)]
    factors = [triangle(design[group], target[group]) for group in groups]
    found = solve_without_each(factors, triangle(prior, np.zeros(4)))
    for group, coefficients in zip(groups, found, strict=True):
        keep = np.ones(60, dtype=bool)
        keep[group] = False
        rows = np.vstack([design[keep], prior])
        plain = np.linalg.lstsq(rows, np.concatenate([target[keep], np.zeros(4)]), rcond=None)[0]
        assert coefficients == pytest.approx(plain, rel=1e-11)


def test_prior_rows_are_ridge_regression() -> None:
    """Extra rows sqrt(alpha) I with target 0 give scikit-learn's Ridge without intercept."""
    design, target = data()
    alpha = 3.0
    found = solve(np.vstack([design, np.sqrt(alpha) * np.eye(4)]), np.concatenate([target, np.zeros(4)])).coefficients
    assert found == pytest.approx(
        Ridge(alpha=alpha, fit_intercept=False, tol=1e-12).fit(design, target).coef_, rel=1e-9
    )


def test_huber_weights_solve_the_same_problem_as_scikit_learn() -> None:
    """At the library's own scale, iterated weights reach its coefficients (its solver stops at 1e-5)."""
    design, target = data()
    target[:5] += 8.0
    oracle = HuberRegressor(epsilon=HUBER_K, alpha=0.0, fit_intercept=False, tol=1e-9, max_iter=2000).fit(
        design, target
    )
    weight = np.ones(len(target))
    for _ in range(200):
        root = np.sqrt(weight)
        found = solve(design * root[:, None], target * root).coefficients
        weight = huber_weights((target - design @ found) / oracle.scale_)
    assert found == pytest.approx(oracle.coef_, rel=1e-4)


def test_the_robust_scale_of_normal_values_is_their_standard_deviation() -> None:
    """MAD times 1.4826; 20 000 values give it to about 1 %."""
    assert robust_sd(np.random.default_rng(7).normal(scale=2.0, size=20_000)) == pytest.approx(2.0, rel=0.02)


def test_the_covariance_is_that_of_repeated_experiments() -> None:
    """Spread of 2 000 refits against the stated covariance (each variance to about 3 %)."""
    rng = np.random.default_rng(7)
    design, _ = data()
    fits = np.array([solve(design, rng.normal(size=60)).coefficients for _ in range(2000)])
    assert fits.var(axis=0) == pytest.approx(np.diag(solve(design, np.ones(60)).covariance_unscaled), rel=0.15)
