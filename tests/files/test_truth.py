"""Truth to score against."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from footcal.errors import FileFormatError, SettingError
from footcal.files.tables import write_table
from footcal.files.truth import read_truth


def made(path: Path, metadata: dict[str, str] | None = None) -> Path:
    """Write truth of leg a (three axes), b (vertical and contact) and c (contact alone)."""
    frame = pd.DataFrame(
        {
            "t_s": [0.0, 0.1],
            "a.fx_N": [1.0, 2.0],
            "a.fy_N": [3.0, 4.0],
            "a.fz_N": [5.0, 6.0],
            "b.fz_N": [7.0, 8.0],
            "b.contact": [1, 0],
            "c.contact": [np.nan, 1],
        }
    )
    write_table(frame, path, metadata)
    return path


def test_force_and_contact_land_in_their_places(tmp_path: Path) -> None:
    """What a leg lacks is NaN."""
    truth = read_truth(made(tmp_path / "t.parquet"), ["a", "b", "c"], "world")
    np.testing.assert_array_equal(truth.force_N[1], [[2, 4, 6], [np.nan, np.nan, 8], [np.nan, np.nan, np.nan]])
    np.testing.assert_array_equal(truth.contact, [[np.nan, 1, np.nan], [np.nan, 0, 1]])


@pytest.mark.parametrize("suffix", [".csv", ".parquet"])
def test_the_frame_is_taken_from_the_file(tmp_path: Path, suffix: str) -> None:
    """Metadata names it."""
    assert read_truth(made(tmp_path / f"t{suffix}", {"frame": "body"}), ["a"]).frame == "body"


def test_the_frame_is_taken_from_the_option_where_the_file_is_silent(tmp_path: Path) -> None:
    """`--frame` names it."""
    assert read_truth(made(tmp_path / "t.csv"), ["a"], "world").frame == "world"


@pytest.mark.parametrize(
    ("in_file", "option", "message"),
    [({}, None, "--frame body or --frame world"), ({"frame": "body"}, "world", "says world"), ({}, "hip", "'hip'")],
)
def test_an_unknown_frame_is_refused(tmp_path: Path, in_file: dict[str, str], option: str, message: str) -> None:
    """Missing, contradicted, or no frame of ours."""
    with pytest.raises(SettingError, match=message):
        read_truth(made(tmp_path / "t.csv", in_file), ["a"], option)


def test_a_leg_without_truth_is_refused_by_name(tmp_path: Path) -> None:
    """The legs that are there are listed."""
    with pytest.raises(FileFormatError, match=r"leg 'd'.*a, b, c"):
        read_truth(made(tmp_path / "t.csv"), ["d"], "body")


def test_times_running_backwards_are_refused(tmp_path: Path) -> None:
    """The row is named."""
    (tmp_path / "t.csv").write_text("t_s,a.fz_N\n1,0\n0,0\n")
    with pytest.raises(FileFormatError, match=r"line 3.*backwards"):
        read_truth(tmp_path / "t.csv", ["a"], "body")
