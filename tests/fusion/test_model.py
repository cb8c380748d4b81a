"""Settings: names, ranges, and the constants they become."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.fusion.model import FusionSettings, settings_from_table
from tests.fusion.lone import lone_filter


def test_a_table_replaces_starting_values() -> None:
    """A value of the [fusion] table stands in place of the starting value, the others stay."""
    settings = settings_from_table({"moving_tau_s": 0.08})
    assert settings.moving_tau_s == 0.08
    assert settings.swing_tau_s == FusionSettings().swing_tau_s


@pytest.mark.parametrize(
    ("table", "words"),
    [
        ({"moving_tau": 0.08}, "no setting 'moving_tau'"),
        ({"moving_tau_s": "fast"}, "must be a number"),
        ({"moving_tau_s": True}, "must be a number"),
        ({"moving_tau_s": -1.0}, "zero or above"),
        ({"moving_tau_s": float("nan")}, "finite"),
        ({"moving_tau_s": 0.0}, "above zero"),
        ({"on_p": 1.5}, "between 0 and 1"),
        ({"off_p": 0.95}, "below on_p"),
    ],
)
def test_a_bad_setting_is_refused_with_the_reason(table: dict[str, object], words: str) -> None:
    """Unknown names, words, negative, missing and out-of-range numbers are errors that say what is allowed."""
    with pytest.raises(SettingError, match=words):
        settings_from_table(table)


def test_shares_become_newtons_of_the_robots_weight() -> None:
    """0.035 of 200 N is 7 N (by hand)."""
    assert float(lone_filter(FusionSettings(), 200.0).c["fil_cost_N"][0]) == pytest.approx(7.0)


def test_rates_stand_from_row_to_column() -> None:
    """Row is the mode left, column the mode entered; nothing leads from a mode to itself."""
    rates = lone_filter(FusionSettings(), 200.0).c["fil_rate_per_s"]
    assert rates[0, 1] == 1.2
    assert rates[2, 1] == 20.0
    assert np.diag(rates).tolist() == [0.0, 0.0, 0.0]


def test_resets_spare_the_motor_torques() -> None:
    """Entering swing resets force, friction error and residual, never the torques that the motors have measured."""
    keep = lone_filter(FusionSettings(), 200.0).c["fil_mix_keep"][0, :, 0]
    assert keep.tolist() == [0.0] * 6 + [1.0] * 3 + [0.0]
