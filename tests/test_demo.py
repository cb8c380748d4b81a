"""The demo, once through: finite figures within sane bounds, one foot flagged, a report that stands alone."""

from __future__ import annotations

import contextlib
import io
import json
import sqlite3
from pathlib import Path
from typing import Any

import pytest

from footcal.calfile import Calibration
from footcal.cli.main import run
from footcal.demo.feet import FEET
from footcal.recipe.data import data_dir
from tests.report.html_parts import outside_links, parts_of

pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return where the demo shall write."""
    return tmp_path_factory.mktemp("demo") / "out"


@pytest.fixture(scope="module")
def document(folder: Path) -> dict[str, Any]:
    """Return what `footcal demo --json` prints; it leaves with 0 although one foot is bad."""
    printed = io.StringIO()
    with contextlib.redirect_stdout(printed), pytest.raises(SystemExit) as left:
        run(["demo", "--out", str(folder), "--json"])
    assert left.value.code == 0
    found: dict[str, Any] = json.loads(printed.getvalue())
    return found


def test_feet_are_within_a_few_parts_of_a_hundred_on_another_day(document: dict[str, Any]) -> None:
    """Cells err by less than 0.5 % FS on settled loads, pads by less than 2 %; walking, below 4 %.

    The bounds are common practice, no source: a cell beyond half a per cent, or a pad beyond two, would be sent back.
    """
    for foot in document["feet"]:
        assert 0.0 < foot["static_pct_FS"] < (0.5 if foot["kind"] == "cell" else 2.0)
        assert 0.0 < foot["stance_pct_FS"] < 4.0


def test_two_cells_and_two_pads_were_calibrated(document: dict[str, Any]) -> None:
    """As the issue asks: two load cells, two squash pads, one a leg."""
    kinds = [foot["kind"] for foot in document["feet"]]

    assert kinds.count("cell") == 2
    assert len(kinds) == 4
    assert len({foot["leg"] for foot in document["feet"]}) == 4


def test_both_walks_find_the_steps(document: dict[str, Any]) -> None:
    """On both drives nine samples in ten are right, touchdowns within 30 ms, forces within 15 % of weight.

    The bounds only tell a working fusion from a broken one; how good it is, `make score` tells on fresh seeds.
    """
    assert [walk["drive"] for walk in document["walks"]] == ["belt", "screw"]
    for walk in document["walks"]:
        assert 90.0 < walk["contact_right_pct"] <= 100.0
        assert -30.0 < walk["touchdown_median_ms"] < 30.0
        assert 0.0 < walk["vertical_rmse_pct"] < 15.0


def test_exactly_the_bad_foot_is_flagged(document: dict[str, Any]) -> None:
    """The foot whose simulated span falls by 0.7 % a week from the fourth week on is flagged, the good one is not."""
    verdicts = {verdict["foot_id"]: verdict for verdict in document["drift"]}
    bad = {foot.foot_id for foot in FEET if foot.goes_bad}

    assert {foot_id for foot_id, verdict in verdicts.items() if verdict["verdict"] != "fit for use"} == bad
    for foot_id in bad:
        assert verdicts[foot_id]["span_pct"] == pytest.approx(-4.9, abs=1.5)  # 7 weeks of 0.7 %, by hand


def test_history_holds_ten_weeks_of_each_checked_foot(document: dict[str, Any], folder: Path) -> None:
    """Every packaged check is in the history, once."""
    assert document["drift"]
    history = sqlite3.connect(folder / "drift.sqlite")
    try:
        (count,) = history.execute("SELECT count(*) FROM checks").fetchone()
    finally:
        history.close()
    assert count == sum(foot.weeks for foot in FEET)


def test_report_stands_alone_with_its_pictures(document: dict[str, Any], folder: Path) -> None:
    """No network, at most 3 MB, and the pictures a practitioner wants, each with words."""
    path = folder / "report.html"
    html = path.read_text(encoding="utf-8")
    parts = parts_of(html)

    wanted = {f"walk_{drive}_{what}" for drive in ("belt", "screw") for what in ("forces", "contacts", "probability")}
    wanted |= {f"{what}_{foot}" for foot in ("LC-0417", "SP-0032") for what in ("loading", "loop", "errors", "drift")}
    assert set(parts.ids) >= wanted
    assert outside_links(html) == []
    assert path.stat().st_size < 3_000_000
    assert all(len(image["alt"].split()) >= 4 for image in parts.images)
    assert "Invented data." in parts.text
    assert document["invented"] is True


def test_calibration_files_of_the_demo_load(document: dict[str, Any], folder: Path) -> None:
    """Each foot's file is left behind, whole, with the digest that was printed."""
    for foot in document["feet"]:
        assert Calibration.load(folder / f"{foot['foot_id']}.cal.json").digest == foot["sha256"]


def test_packaged_data_are_small_and_labelled() -> None:
    """All demo data together stay below 2 MB, and each session and the folder say that they are invented."""
    data = data_dir("calib_data")
    files = [path for path in data.rglob("*") if path.is_file()]

    assert sum(path.stat().st_size for path in files) < 2_000_000
    assert "invented" in (data / "README.md").read_text(encoding="utf-8")
    sessions = [path for path in files if path.name == "session.toml"]
    pads = sum(foot.letter in "PQR" for foot in FEET)  # each with a pump recording
    assert len(sessions) == len(FEET) + pads + sum(foot.weeks for foot in FEET)
    assert all("invented" in path.read_text(encoding="utf-8") for path in sessions)
    assert all("invented" in "".join(Calibration.load(p).file.notes) for p in data.glob("walk/*.cal.json"))
