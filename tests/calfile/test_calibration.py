"""The calibration file: round trip, digest, versions, ranges, and the published schema."""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from footcal.calfile import Calibration, CalibrationFile
from footcal.calfile.published import SCHEMA_PATH, schema_text
from footcal.errors import FileFormatError
from footcal.fit.engine import fit_sessions
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session


@cache
def calibration() -> Calibration:
    """A calibration from a simulated bench."""
    rng = np.random.default_rng(110)
    return fit_sessions([as_session(run_session(draw_sensor("Q", rng), rng, parts=("cycles", "quick")))]).calibration


def changed(path: Path, change: dict[str, Any]) -> Path:
    """Save the calibration with some top-level values changed and the digest left as it was."""
    calibration().save(path)
    document = json.loads(path.read_text(encoding="utf-8"))
    path.write_text(json.dumps({**document, **change}), encoding="utf-8")
    return path


def test_a_file_reads_back_bit_for_bit(tmp_path: Path) -> None:
    """Written and read, every value is the same float."""
    calibration().save(tmp_path / "a.cal.json")
    assert Calibration.load(tmp_path / "a.cal.json").file == calibration().file


def test_saving_what_was_read_gives_the_same_bytes(tmp_path: Path) -> None:
    """A second round trip changes nothing."""
    calibration().save(tmp_path / "a.cal.json")
    Calibration.load(tmp_path / "a.cal.json").save(tmp_path / "b.cal.json")
    assert (tmp_path / "a.cal.json").read_bytes() == (tmp_path / "b.cal.json").read_bytes()


def test_a_read_file_gives_the_same_force(tmp_path: Path) -> None:
    """The runtime sees no difference between a fresh fit and its file."""
    calibration().save(tmp_path / "a.cal.json")
    t_s, raw = np.arange(200) * 0.01, np.linspace(20_000.0, 40_000.0, 200)
    fresh, read = calibration().force(t_s, raw), Calibration.load(tmp_path / "a.cal.json").force(t_s, raw)
    assert fresh.force_N.tobytes() == read.force_N.tobytes()
    assert fresh.u_N.tobytes() == read.u_N.tobytes()


def test_a_changed_value_breaks_the_digest(tmp_path: Path) -> None:
    """Editing a file by hand is noticed."""
    path = changed(tmp_path / "a.cal.json", {"notes": ["edited"]})
    with pytest.raises(FileFormatError, match="digest does not fit"):
        Calibration.load(path)


def test_an_unknown_major_version_is_refused(tmp_path: Path) -> None:
    """A file of the future says which version it is."""
    with pytest.raises(FileFormatError, match=r"version 2\.0 is not known"):
        Calibration.load(changed(tmp_path / "a.cal.json", {"version": "2.0"}))


def test_a_value_out_of_range_is_named_by_its_path(tmp_path: Path) -> None:
    """The message leads to the value."""
    unload = {"share_of_peak": 3.0, "decay_s": 6.0}
    with pytest.raises(FileFormatError, match=r"\$\.unload\.share_of_peak"):
        Calibration.load(changed(tmp_path / "a.cal.json", {"unload": unload}))


def test_a_file_of_another_kind_is_refused(tmp_path: Path) -> None:
    """Any other JSON is no calibration file."""
    (tmp_path / "a.cal.json").write_text('{"robot_id": "demo"}', encoding="utf-8")
    with pytest.raises(FileFormatError, match="no calibration file"):
        Calibration.load(tmp_path / "a.cal.json")


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    """The path stands in the message."""
    with pytest.raises(FileFormatError, match="nowhere"):
        Calibration.load(tmp_path / "nowhere.cal.json")


def test_a_file_cut_anywhere_is_refused_and_never_half_read(tmp_path: Path) -> None:
    """Cut at 200 places over its length: always a FileFormatError."""
    calibration().save(tmp_path / "a.cal.json")
    whole = (tmp_path / "a.cal.json").read_bytes().rstrip()
    for end in np.linspace(0, len(whole) - 1, 200).astype(int):
        (tmp_path / "cut.cal.json").write_bytes(whole[:end])
        with pytest.raises(FileFormatError):
            Calibration.load(tmp_path / "cut.cal.json")


def test_the_published_schema_is_that_of_the_code() -> None:
    """footcal/calfile/schema.json is generated; this test says when to make it anew."""
    assert SCHEMA_PATH.read_text(encoding="utf-8") == schema_text()


def test_the_uncertainty_of_a_settled_reading_grows_with_the_load() -> None:
    """U at the top is above U at zero for a pad."""
    u = calibration().u_static_N(np.array([0.0, calibration().file.validity.force_max_N]))
    assert 0.0 < u[0] < u[1]


def test_the_model_has_all_final_fields() -> None:
    """Version 1 holds every part that the design names."""
    assert set(CalibrationFile.model_fields) >= {
        "foot_id",
        "provenance",
        "input",
        "model",
        "unload",
        "validity",
        "figures",
        "uncertainty",
        "history",
        "set_aside",
        "sha256",
    }
