"""Tests of the recipes for one question: side load, long creep, running in, overload."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest

from footcal.errors import FileFormatError
from footcal.recipe.reading import read_recipe, ready_recipes, recipe_from

LISTED = ("load_cell", "cheap_cell", "off_axis_cell", "resistive_pad", "magnetic_pad", "capacitive_pad")
SPECIAL = ("creep_30min", "tilted", "run_in")


@pytest.fixture
def tilted() -> dict[str, Any]:
    """Return the tilted recipe as a TOML document that may be changed."""
    return tomllib.loads(ready_recipes()["tilted"].read_text(encoding="utf-8"))


def test_three_cells_three_pads_and_the_special_recipes_are_listed() -> None:
    """The names of the calibration issue; overload is not among them."""
    ready = ready_recipes()
    assert {*LISTED, *SPECIAL} <= set(ready)
    assert "overload" not in ready


@pytest.mark.parametrize("name", [*LISTED, *SPECIAL, "overload"])
def test_each_has_its_purpose_and_its_warnings(name: str) -> None:
    """One sentence of purpose; weights, safe limit and the note that this is no safety function."""
    recipe = read_recipe(name).recipe
    words = " ".join(recipe.cautions)
    assert recipe.name == name
    assert recipe.purpose.endswith(".")
    assert recipe.purpose.count(". ") == 0
    for needed in ("Weights fall", "safe limit", "no safety function", "Local rules"):
        assert needed in words


def test_overload_is_read_by_its_name_only() -> None:
    """Asked for by name it comes, with its danger said first; nearly right names are not led to it."""
    recipe = read_recipe("overload").recipe
    assert recipe.on_request
    assert recipe.cautions[0].startswith("Danger")
    with pytest.raises(FileFormatError) as caught:
        read_recipe("overlod")
    assert "overload" not in caught.value.mend


def test_a_recipe_that_overloads_without_saying_so_is_refused() -> None:
    """Loads beyond capacity need on_request = true."""
    document = tomllib.loads(read_recipe("overload").path.read_text(encoding="utf-8"))
    del document["on_request"]
    with pytest.raises(FileFormatError, match="on_request"):
        recipe_from(document, "mine.toml")


def test_an_overload_never_exceeds_the_safe_limit() -> None:
    """1.1 of the safe limit is refused where the value stands."""
    document = tomllib.loads(read_recipe("overload").path.read_text(encoding="utf-8"))
    document["overload"]["target"] = 1.1
    with pytest.raises(FileFormatError, match=r"overload\.target"):
        recipe_from(document, "mine.toml")


def test_tilted_turns_the_foot_four_ways_on_each_wedge() -> None:
    """±15° and ±30° about two axes (the issue's recipe), three loads; the worst danger is said first."""
    recipe = read_recipe("tilted").recipe
    expected = {(s * w, 0.0) for s in (1, -1) for w in (15.0, 30.0)} | {
        (0.0, s * w) for s in (1, -1) for w in (15.0, 30.0)
    }
    assert set(recipe.tilted.postures) == expected
    assert len(recipe.tilted.postures) == 8
    assert len(recipe.tilted.targets) == 3
    assert "Danger" in recipe.cautions[0]


@pytest.mark.parametrize(
    ("key", "value", "where"),
    [
        ("wedges_deg", [30.0, 15.0], "must rise"),
        ("wedges_deg", [60.0], r"tilted\.wedges_deg\[0\]"),
        ("targets", [], "belong together"),
        ("axes", ["x", "x"], "each axis once"),
        ("axes", ["z"], r"tilted\.axes\[0\]"),
    ],
)
def test_a_wrong_wedge_is_refused(tilted: dict[str, Any], key: str, value: object, where: str) -> None:
    """Where and what are named."""
    tilted["tilted"][key] = value
    with pytest.raises(FileFormatError, match=where):
        recipe_from(tilted, "mine.toml")


def test_creep_takes_half_an_hour_each_way() -> None:
    """1800 s under load, 1800 s after it, counted in the time at the bench."""
    recipe = read_recipe("creep_30min").recipe
    assert (recipe.stand.lasts_s, recipe.stand.zero_s) == (1800.0, 1800.0)
    assert recipe.handling_s > 3600.0


def test_run_in_goes_on_until_five_peaks_agree() -> None:
    """DESIGN 7: run-in until five successive readings agree."""
    presses = read_recipe("run_in").recipe.presses
    assert presses.agree_count == 5
    assert presses.agree_pct > 0.0
    assert presses.count >= 20
