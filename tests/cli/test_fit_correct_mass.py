"""`footcal fit --correct-mass` as it is typed."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from footcal.cli.main import run
from footcal.files.session import read_session
from footcal.recipe.data import data_dir

FOOT = data_dir("calib_data") / "LC-0417" / "session"


def called(*words: str | Path) -> int:
    """Run the command line and return its exit code."""
    with pytest.raises(SystemExit) as stop:
        run([str(word) for word in words])
    return int(stop.value.code or 0)


def test_a_corrected_mass_is_told_in_the_file_and_in_what_is_printed(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A grossly wrong correction: the step is set aside under the mass that was given, and the change is told."""
    steps = read_session(FOOT).steps
    row = steps[(steps["kind"] == "hold") & (steps["mass_kg"] > 5.0)].iloc[3]
    step, mass_kg = int(row["step"]), float(row["mass_kg"])
    out = tmp_path / "a.cal.json"
    assert called("fit", FOOT, "--out", out, "--json", "--correct-mass", f"{step}={mass_kg + 3.0:g}") == 0
    document = json.loads(capsys.readouterr().out)
    words = f"step {step}: {mass_kg:g} kg entered, corrected to {mass_kg + 3.0:g} kg"
    assert any(words in note for note in document["notes"])
    aside = next(one for one in document["set_aside"] if one["step"] == step)
    assert aside["entered_kg"] == pytest.approx(mass_kg + 3.0, abs=1e-6)
    assert aside["fits_kg"] == pytest.approx(mass_kg, abs=0.3)
    written = json.loads(out.read_text(encoding="utf-8"))
    assert written["provenance"]["sessions"][0]["corrected"] == [words]


@pytest.mark.parametrize("option", ["9999=5", "5", "elsewhere:5=5"])
def test_a_correction_that_belongs_to_no_step_leaves_with_code_2_and_no_file(
    option: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Said on stderr with the option's name."""
    out = tmp_path / "a.cal.json"
    assert called("fit", FOOT, "--out", out, "--correct-mass", option) == 2
    assert "--correct-mass" in capsys.readouterr().err
    assert not out.exists()
