"""Rules for other names and units."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.files.columns import ColumnRule, column_rules, expand_legs


def test_a_rule_may_be_a_name_or_a_table() -> None:
    """Both forms of DESIGN §4 are read; a table without a name keeps ours."""
    rules = column_rules({"a": "x", "b": {"name": "y", "scale": 0.001}, "c": {"offset": 2}}, "robot.toml")
    assert rules == {"a": ColumnRule("x"), "b": ColumnRule("y", 0.001), "c": ColumnRule("c", 1.0, 2.0)}


@pytest.mark.parametrize("value", [3, {"nam": "x"}, {"scale": "2"}, {"scale": 0}, {"offset": float("nan")}])
def test_a_rule_of_another_form_is_refused_with_its_place(value: Any) -> None:
    """The file, the table and the key are named."""
    with pytest.raises(SettingError, match=r"robot\.toml, \[columns\], a"):
        column_rules({"a": value}, "robot.toml, [columns]")


def test_a_pattern_stands_for_every_leg_and_is_outranked_by_a_rule_for_one() -> None:
    """`{leg}` is replaced on both sides."""
    rules = {"{leg}.raw": ColumnRule("{leg}_adc"), "b.raw": ColumnRule("spare")}
    assert expand_legs(rules, ["a", "b"]) == {"a.raw": ColumnRule("a_adc"), "b.raw": ColumnRule("spare")}


def test_scale_comes_before_offset() -> None:
    """By hand: 2 * 10 + 1 = 21."""
    assert ColumnRule("x", scale=2.0, offset=1.0).apply(np.array([10.0])).tolist() == [21.0]
