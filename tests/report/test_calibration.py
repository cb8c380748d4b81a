"""The report of a real fit of the packaged (invented) session."""

from __future__ import annotations

import time
from pathlib import Path

import numpy as np
import pytest

from footcal.files.session import read_session
from footcal.fit.engine import fit_sessions
from footcal.fit.outcome import FitResult
from footcal.recipe.data import data_dir
from footcal.report.calibration import calibration_page, write_calibration_report
from footcal.report.points import hold_points
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from footcal.sim.tilting import run_tilted
from tests.report.html_parts import outside_links, parts_of
from tests.simulated import as_session

PICTURES = {
    *("course", "loading", "loop", "by_force", "by_time", "by_temperature", "left_out"),
    *("uncertainty", "budget"),
}


@pytest.fixture(scope="module")
def result() -> FitResult:
    """Return the fit of the packaged load cell."""
    return fit_sessions([read_session(data_dir("calib_data") / "LC-0388" / "session")])


@pytest.fixture(scope="module")
def html(result: FitResult, tmp_path_factory: pytest.TempPathFactory) -> str:
    """Return its report; 5 s of processor time and 3 MB are the most it may take (issue of the report)."""
    path = tmp_path_factory.mktemp("report") / "report.html"
    start_s = time.process_time()
    write_calibration_report(result, path)
    assert time.process_time() - start_s < 5.0
    assert path.stat().st_size < 3_000_000
    return path.read_text(encoding="utf-8")


def test_report_needs_no_network(html: str) -> None:
    """Nothing in it is fetched from elsewhere."""
    assert outside_links(html) == []


def test_report_has_every_picture_with_words(html: str) -> None:
    """All nine pictures are there, under different names, each with a text of at least four words."""
    parts = parts_of(html)

    assert set(parts.ids) >= PICTURES
    assert len(parts.ids) == len(set(parts.ids))
    assert len(parts.images) == len(PICTURES)
    assert all(len(image["alt"].split()) >= 4 for image in parts.images)
    assert all(2_000 < len(image["src"]) < 600_000 for image in parts.images)


def test_report_states_what_the_file_states(html: str, result: FitResult) -> None:
    """Foot, digest, U at the top and the cautions are those of the calibration file."""
    text, file = parts_of(html).text, result.calibration.file

    assert f"Calibration of foot {file.foot_id}" in text
    assert file.sha256 in text
    assert f"±{file.uncertainty.curve[-1].U_N:.3g} N" in text
    assert "Side loads were not tested" in text
    assert "Invented data." in text
    assert " nan " not in text.lower()


def test_report_states_the_side_load_of_a_tilted_foot() -> None:
    """A foot that was tilted: its cross-sensitivities stand in the page as in the file, and the caution is gone."""
    rng = np.random.default_rng(100)
    sensor = draw_sensor("B", rng)
    level = as_session(run_session(sensor, rng, parts=("presses", "cycles", "quick")))
    result = fit_sessions([level, as_session(run_tilted(sensor, rng))])
    page, cross = calibration_page(result), result.calibration.file.model.cross_axis
    facts = dict(page.sections[0].facts)

    assert f"{100.0 * cross.x:+.2f} %" in facts["Side load"]
    assert f"{100.0 * cross.y:+.2f} %" in facts["Side load"]
    assert not any("Side loads were not tested" in caution for caution in page.cautions)


def test_every_step_set_aside_is_named(html: str, result: FitResult) -> None:
    """Nothing is left out silently."""
    text = parts_of(html).text

    assert all(aside.reason in text for aside in result.calibration.file.set_aside)
    assert ("Nothing: every step fits the rest." in text) == (not result.calibration.file.set_aside)


def test_points_hold_the_loads_and_shrink_by_the_model(result: FitResult) -> None:
    """Loads are those of the holds; the whole model leaves less than the curve alone."""
    points = hold_points(result)

    fitted = {result.data.holds[i].load_N for i in result.rows.hold if i >= 0}
    assert sorted({round(load, 6) for load in points.load_N}) == sorted({round(load, 6) for load in fitted})
    assert np.sqrt(np.mean(points.after_N**2)) < 0.5 * np.sqrt(np.mean(points.before_N**2))


def test_report_of_a_path_that_cannot_be_written_leaves_nothing(result: FitResult, tmp_path: Path) -> None:
    """A file in the way of a folder is refused, and nothing half-written stays."""
    (tmp_path / "file").write_text("in the way", encoding="utf-8")

    with pytest.raises(Exception, match="can't write here"):
        write_calibration_report(result, tmp_path / "file" / "report.html")
    assert [path.name for path in tmp_path.iterdir()] == ["file"]
