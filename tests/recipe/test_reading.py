"""Tests of reading recipes."""

import copy
import hashlib
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from footcal.errors import FileFormatError
from footcal.recipe.reading import read_recipe, ready_recipes, recipe_from

READY = ["capacitive_pad", "load_cell", "magnetic_pad", "resistive_pad", "squash_pad", "weekly_check"]


@pytest.fixture
def document() -> dict[str, Any]:
    """Return the load-cell recipe as a TOML document that may be changed."""
    return tomllib.loads(ready_recipes()["load_cell"].read_text(encoding="utf-8"))


def test_the_ready_recipes_are_all_there() -> None:
    """Six recipes come with footcal (others may join them)."""
    assert set(READY) <= set(ready_recipes())


@pytest.mark.parametrize("name", READY)
def test_a_ready_recipe_reads(name: str) -> None:
    """Each is called what its file is called, tells its purpose in one sentence, and warns of falling weights."""
    recipe = read_recipe(name).recipe
    assert recipe.name == name
    assert recipe.purpose.endswith(".")
    assert recipe.purpose.count(". ") == 0
    assert any("Weights fall" in caution for caution in recipe.cautions)
    assert any("no safety function" in caution for caution in recipe.cautions)


@pytest.mark.parametrize("name", READY[:-1])
def test_a_full_recipe_is_the_session_of_the_design(name: str) -> None:
    """Three presses, 6 s dwell, 14 minor turns, a dozen quick lifts, 22, 8 and 38 °C; 5 loads for cells, 9 for pads."""
    recipe = read_recipe(name).recipe
    assert (recipe.presses.count, recipe.loading.dwell_s, len(recipe.minor_loop.targets)) == (3, 6.0, 14)
    assert recipe.quick_lifts.count == 12
    assert recipe.temperatures.sets_C == (22.0, 8.0, 38.0)
    assert len(recipe.loading.targets) == (5 if "cell" in recipe.sensor_kinds else 9)
    assert recipe.dynamic
    assert 8.0 < recipe.handling_s / 60.0 < 20.0


def test_the_weekly_check_is_short() -> None:
    """It takes one to two minutes and makes no calibration dynamic."""
    recipe = read_recipe("weekly_check").recipe
    assert 60.0 < recipe.handling_s < 120.0
    assert not recipe.dynamic


def test_the_digest_is_that_of_the_file(tmp_path: Path) -> None:
    """SHA-256 of the bytes, as `sha256sum` gives it; one changed byte changes it."""
    text = ready_recipes()["load_cell"].read_bytes()
    path = tmp_path / "mine.toml"
    path.write_bytes(text)
    assert read_recipe(path).sha256 == hashlib.sha256(text).hexdigest()
    path.write_bytes(text + b"\n")
    assert read_recipe(path).sha256 != hashlib.sha256(text).hexdigest()


CHANGES: list[tuple[str, Callable[[dict[str, Any]], object], str]] = [
    ("loading.targets[2]", lambda d: d["loading"]["targets"].__setitem__(2, 1.4), "1.4 is refused"),
    ("loading.targets", lambda d: d["loading"].__setitem__("targets", [0.1, 0.5, 0.4]), "0.4 follows 0.5"),
    ("loading.targets", lambda d: d["loading"].__setitem__("targets", []), "at least 1"),
    ("loading.dwel_s", lambda d: d["loading"].__setitem__("dwel_s", 3.0), "Did you mean 'dwell_s'?"),
    ("loading.dwell_s", lambda d: d["loading"].__setitem__("dwell_s", "six"), "'six' is refused"),
    ("loading.dwell_s", lambda d: d["loading"].__setitem__("dwell_s", float("nan")), "finite"),
    ("purpose", lambda d: d.pop("purpose"), "missing"),
    ("format", lambda d: d.__setitem__("format", 2), "2 is refused"),
    ("name", lambda d: d.__setitem__("name", "My Recipe"), "small letters"),
    ("sensor_kinds[0]", lambda d: d.__setitem__("sensor_kinds", ["scale"]), "'scale' is refused"),
    ("minor_loop.targets", lambda d: d["minor_loop"].__setitem__("targets", [0.5, 0.6]), "must turn"),
    ("quick_lifts", lambda d: d["quick_lifts"].__setitem__("targets", []), "at least one target"),
    ("temperatures.sets_C[1]", lambda d: d["temperatures"].__setitem__("sets_C", [22, 400]), "400 is refused"),
    ("presses.count", lambda d: d["presses"].update(count=True), "True is refused"),
    ("columns.raw.scale", lambda d: d.__setitem__("columns", {"raw": {"name": "adc", "scale": 0.0}}), "scale of 0"),
    ("columns.raw", lambda d: d.__setitem__("columns", {"raw": 3}), "3 is refused"),
    ("dwell", lambda d: d.__setitem__("dwell", 3), "Known here"),
]


@pytest.mark.parametrize(("path", "change", "words"), CHANGES, ids=[f"{i} {case[0]}" for i, case in enumerate(CHANGES)])
def test_a_bad_value_is_named_by_its_path(
    document: dict[str, Any], path: str, change: Callable[[dict[str, Any]], object], words: str
) -> None:
    """The message gives file, path, the value found and what is wrong with it."""
    change(document)
    with pytest.raises(FileFormatError) as caught:
        recipe_from(document, "mine.toml")
    assert caught.value.where == f"mine.toml, {path}"
    assert words in str(caught.value)


def test_columns_may_be_renamed_or_scaled(document: dict[str, Any]) -> None:
    """A name alone renames; a table scales and shifts too."""
    document["columns"] = {"raw": "adc", "temp_C": {"name": "T", "scale": 0.1}}
    columns = recipe_from(document, "mine.toml").columns
    assert columns["raw"] == "adc"
    assert columns["temp_C"].model_dump() == {"name": "T", "scale": 0.1, "offset": 0.0}


def test_a_recipe_cannot_be_changed(document: dict[str, Any]) -> None:
    """A read recipe is frozen all the way down."""
    recipe = recipe_from(document, "mine.toml")
    with pytest.raises(ValueError, match="frozen"):
        recipe.loading.dwell_s = 1.0  # type: ignore[misc]
    assert isinstance(recipe.loading.targets, tuple)


@pytest.mark.parametrize(
    ("content", "words"), [(b"", "format"), (b"name = ", "no recipe"), (b"\xff\xfe", "no recipe"), (b"[[", "no recipe")]
)
def test_a_broken_file_is_refused_by_name(tmp_path: Path, content: bytes, words: str) -> None:
    """Empty, cut, or no text at all: the file is named, and there is no traceback of another library."""
    path = tmp_path / "broken.toml"
    path.write_bytes(content)
    with pytest.raises(FileFormatError, match=r"broken\.toml") as caught:
        read_recipe(path)
    assert words in str(caught.value)


def test_a_recipe_cut_anywhere_is_refused_or_read(tmp_path: Path) -> None:
    """Cut at any byte, a recipe raises our own error or still reads; nothing else comes out."""
    text = ready_recipes()["weekly_check"].read_bytes()
    path = tmp_path / "cut.toml"
    outcomes = []
    for end in range(0, len(text), 7):
        path.write_bytes(text[:end])
        try:
            outcomes.append(read_recipe(path).recipe.name)
        except FileFormatError as error:
            outcomes.append(error.what)
    assert "weekly_check" in outcomes
    assert len(set(outcomes)) > 2


def test_a_missing_file_and_a_missing_name_are_told_apart() -> None:
    """A path that is not there is named; a name that is nearly right gets the right one offered."""
    with pytest.raises(FileFormatError, match=r"nowhere\.toml"):
        read_recipe("nowhere.toml")
    with pytest.raises(FileFormatError, match="Did you mean load_cell"):
        read_recipe("loadcell")


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=True) | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)


@given(st.sampled_from(["format", "loading", "presses", "columns", "temperatures", "cautions", "settle", "x"]), VALUES)
@settings(max_examples=200, deadline=None)
def test_any_value_in_any_place_is_read_or_refused(key: str, value: Any) -> None:
    """Whatever stands in a place, our own error comes out or a recipe."""
    changed = copy.deepcopy(tomllib.loads(ready_recipes()["load_cell"].read_text(encoding="utf-8")))
    changed[key] = value
    try:
        outcome = recipe_from(changed, "mine.toml").name
    except FileFormatError as error:
        outcome = error.where
    assert outcome == "load_cell" or outcome.startswith("mine.toml, ")
