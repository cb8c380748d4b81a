"""How far a foot may drift."""

from __future__ import annotations

import pytest

from footcal.drift.limits import drift_limits
from footcal.errors import SettingError


@pytest.mark.parametrize(
    ("kind", "span_pct", "zero_N"),
    [("cell", 1.0, 2.5), ("resistive", 2.0, 5.0), ("magnetic", 2.0, 5.0), ("capacitive", 2.0, 5.0)],
)
def test_default_limits_are_those_of_the_issue(kind: str, span_pct: float, zero_N: float) -> None:
    """Cells 1 % span and 0.5 % FS zero, pads 2 % and 1 %; by hand for 500 N full scale."""
    limits = drift_limits(kind, 500.0)
    assert (limits.span_pct, limits.zero_N) == (span_pct, pytest.approx(zero_N, rel=1e-12))


def test_asked_for_limits_stand_instead() -> None:
    """By hand: 0.2 % of 500 N are 1 N."""
    limits = drift_limits("cell", 500.0, span_pct=3.0, zero_pct_FS=0.2)
    assert (limits.span_pct, limits.zero_N) == (3.0, pytest.approx(1.0, rel=1e-12))


@pytest.mark.parametrize("limit", [0.0, -1.0, float("nan"), 100.0])
def test_a_limit_out_of_range_is_refused(limit: float) -> None:
    """The option is named."""
    with pytest.raises(SettingError, match="--limit-span-pct"):
        drift_limits("cell", 500.0, span_pct=limit)


def test_an_unknown_kind_is_refused() -> None:
    """There is no default for it."""
    with pytest.raises(SettingError, match="piezo"):
        drift_limits("piezo", 500.0)
