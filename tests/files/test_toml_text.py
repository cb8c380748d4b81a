"""TOML out and in."""

from __future__ import annotations

import datetime as dt
import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.errors import FileFormatError
from footcal.files.toml_text import read_toml, toml_text

words = st.text(st.characters(exclude_categories=["Cs"]), max_size=12)
scalars = (
    words
    | st.booleans()
    | st.integers(-(2**62), 2**62)
    | st.floats(allow_nan=False)
    | st.datetimes().map(lambda moment: moment.replace(tzinfo=dt.UTC))
)
values = st.recursive(
    scalars, lambda inner: st.lists(inner, max_size=3) | st.dictionaries(words, inner, max_size=3), max_leaves=8
)


@given(st.dictionaries(words, values, max_size=5))
def test_what_is_written_reads_back_equal(document: dict[str, Any]) -> None:
    """The standard library's reader gives back every key and value."""
    assert tomllib.loads(toml_text(document)) == document


def test_none_is_left_out() -> None:
    """A value that nobody said has no line."""
    assert toml_text({"a": None, "b": 1}) == "b = 1\n"


def test_a_value_without_a_toml_form_is_refused() -> None:
    """An object is no TOML value."""
    with pytest.raises(TypeError, match="object"):
        toml_text({"a": object()})


def test_a_broken_file_is_refused_with_its_line(tmp_path: Path) -> None:
    """The second line lacks its value, and the message says so."""
    (tmp_path / "a.toml").write_text("a = 1\nb =\n")
    with pytest.raises(FileFormatError, match=r"a\.toml.*line 2"):
        read_toml(tmp_path / "a.toml")
