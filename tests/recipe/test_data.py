"""Tests of finding the data that come with footcal."""

from pathlib import Path

import pytest

import footcal
from footcal.errors import FileFormatError
from footcal.recipe.data import data_dir


def test_a_checkout_has_its_data_beside_the_package() -> None:
    """From a checkout, the folder at its top is found."""
    assert data_dir("recipes") == Path(footcal.__file__).resolve().parent.parent / "recipes"


def test_installed_data_come_first(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """An installed package looks into itself before it looks around."""
    package = tmp_path / "site" / "footcal"
    inside, beside = package / "_data" / "recipes", tmp_path / "site" / "recipes"
    inside.mkdir(parents=True)
    beside.mkdir()
    monkeypatch.setattr(footcal, "__file__", str(package / "__init__.py"))
    assert data_dir("recipes") == inside.resolve()


def test_missing_data_are_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Without either folder, the message says which and how to mend it."""
    monkeypatch.setattr(footcal, "__file__", str(tmp_path / "footcal" / "__init__.py"))
    with pytest.raises(FileFormatError, match=r"'calib_data'.*Install footcal again"):
        data_dir("calib_data")
