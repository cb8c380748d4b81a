"""Rules that bring other column names and units to ours: `[columns]` of a recipe or a robot description."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from footcal.errors import SettingError
from footcal.records import FloatArray


@dataclass(frozen=True, slots=True)
class ColumnRule:
    """Our value = scale · (value in the file) + offset, read from the column called `name`."""

    name: str
    scale: float = 1.0
    offset: float = 0.0

    def apply(self, values: FloatArray) -> FloatArray:
        """Return the values in our unit, same shape; untouched where the rule only renames."""
        if self.scale == 1.0 and self.offset == 0.0:
            return values
        return values * self.scale + self.offset


ColumnRules = Mapping[str, ColumnRule]


def column_rules(table: Mapping[str, Any], where: str) -> dict[str, ColumnRule]:
    """Return the rules of a `[columns]` table: `ours = "theirs"` or `ours = {name = "…", scale = 1e-3, offset = 0}`.

    Args:
        table: the TOML table as read.
        where: what to call its place in an error, such as `robot.toml, [columns]`.

    Raises:
        SettingError: a rule is neither a name nor such a table, or a figure in it is not finite or a scale is 0.
    """
    return {ours: _rule(ours, value, where) for ours, value in table.items()}


def expand_legs(rules: ColumnRules, legs: Sequence[str]) -> dict[str, ColumnRule]:
    """Return the rules with `{leg}` replaced by each leg's name; a rule written for one leg outranks the pattern."""
    patterns = {ours: rule for ours, rule in rules.items() if "{leg}" in ours}
    expanded = {
        ours.replace("{leg}", leg): ColumnRule(rule.name.replace("{leg}", leg), rule.scale, rule.offset)
        for leg in legs
        for ours, rule in patterns.items()
    }
    return expanded | {ours: rule for ours, rule in rules.items() if ours not in patterns}


def sources(file_names: Sequence[str], rules: ColumnRules) -> dict[str, str]:
    """Return our column name -> the column of the file it is read from.

    One column may feed several of ours (one thermometer for all feet). A rule whose column the file lacks is passed
    over, so that one table of rules serves several files. A column that feeds a rule is not also read as itself.
    """
    active = {ours: rule.name for ours, rule in rules.items() if rule.name in file_names}
    taken = set(active.values())
    plain = {name: name for name in file_names if name not in taken and name not in active}
    return plain | active


def _rule(ours: str, value: Any, where: str) -> ColumnRule:
    if isinstance(value, str):
        return ColumnRule(value)
    place = f"{where}, {ours}"
    known = {"name", "scale", "offset"}
    if not isinstance(value, Mapping) or not set(value) <= known or not isinstance(value.get("name", ours), str):
        raise SettingError(
            where=place,
            what=f"{value!r} is not a rule",
            mend='Write "name" or { name = "…", scale = 1.0, offset = 0 }.',
        )
    figures = {key: value.get(key, default) for key, default in (("scale", 1.0), ("offset", 0.0))}
    for key, figure in figures.items():
        if isinstance(figure, bool) or not isinstance(figure, int | float) or not math.isfinite(figure):
            raise SettingError(
                where=f"{place}, {key}", what=f"{figure!r} is not a finite number", mend="Write a number."
            )
    if figures["scale"] == 0:
        raise SettingError(
            where=f"{place}, scale", what="it is 0, which wipes the column out", mend="Write the unit's factor."
        )
    return ColumnRule(value.get("name", ours), float(figures["scale"]), float(figures["offset"]))
