"""A mass put right on request: used, told in notes and provenance, and refused where it belongs to no step."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.files.session import Session
from footcal.fit.correct_mass import corrected, parse_corrections
from footcal.fit.engine import fit_sessions
from footcal.sim.bench import run_session
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session


def session(seed: int = 150) -> Session:
    """Three cycles of a cheap cell."""
    rng = np.random.default_rng(seed)
    return as_session(run_session(draw_sensor("B", rng), rng, parts=("cycles",)))


def loaded_step(of: Session, place: int = 5) -> tuple[int, float]:
    """Step number and mass of a held load."""
    row = of.steps[of.steps["mass_kg"] > 5.0].iloc[place]
    return int(row["step"]), float(row["mass_kg"])


def entered(of: Session, step: int, mass_kg: float) -> Session:
    """The session with another mass in the book."""
    steps = of.steps.copy()
    steps.loc[steps["step"] == step, "mass_kg"] = mass_kg
    return replace(of, steps=steps)


def test_a_corrected_mass_takes_the_step_back_in_and_is_told_in_words() -> None:
    """Entered 1 kg too low; corrected, nothing is set aside, and notes and provenance say what was done."""
    good = session()
    step, right_kg = loaded_step(good)
    wrong = entered(good, step, right_kg - 1.0)
    assert [aside.step for aside in fit_sessions([wrong]).calibration.file.set_aside] == [step]
    file = fit_sessions([wrong], correct_mass={step: right_kg}).calibration.file
    words = f"step {step}: {right_kg - 1.0:g} kg entered, corrected to {right_kg:g} kg"
    assert file.set_aside == []
    assert file.provenance.sessions[0].corrected == [words]
    assert any(words in note for note in file.notes)


def test_the_sessions_given_are_not_changed() -> None:
    """The book on the disk and in memory keeps what was entered."""
    good = session()
    step, mass_kg = loaded_step(good)
    changed, _ = corrected([good], {step: mass_kg + 2.0})
    assert loaded_step(good)[1] == mass_kg
    assert loaded_step(changed[0])[1] == mass_kg + 2.0


def test_of_several_sessions_the_one_named_is_corrected() -> None:
    """By name, or by place where names do not tell."""
    one, two = replace(session(), folder=Path("week_01")), replace(session(), folder=Path("week_02"))
    step, mass_kg = loaded_step(one)
    for key in (f"week_02:{step}", f"2:{step}"):
        changed, corrections = corrected([one, two], {key: mass_kg + 2.0})
        assert [loaded_step(each)[1] for each in changed] == [mass_kg, mass_kg + 2.0]
        assert corrections[0].session == 1


@pytest.mark.parametrize(
    ("key", "words"),
    [
        ("999", "has no step 999"),
        ("1", "this step has no mass"),
        ("x", "not a step number"),
        ("week_09:3", "no session"),
    ],
)
def test_a_correction_that_belongs_to_no_step_is_refused(key: str, words: str) -> None:
    """Step 1 is a zero."""
    with pytest.raises(SettingError, match=words):
        corrected([session()], {key: 5.0})


def test_with_several_sessions_a_bare_step_is_refused() -> None:
    """Which one is meant must be said."""
    one = session()
    with pytest.raises(SettingError, match="which of several sessions"):
        corrected([one, one], {loaded_step(one)[0]: 5.0})


@pytest.mark.parametrize("mass_kg", [0.0, -1.0, float("inf")])
def test_a_mass_that_is_none_is_refused(mass_kg: float) -> None:
    """Kilograms are positive."""
    one = session()
    with pytest.raises(SettingError, match="not a positive mass"):
        corrected([one], {loaded_step(one)[0]: mass_kg})


def test_options_are_read_as_step_and_mass() -> None:
    """The last equals sign and the last colon count: session names may hold both."""
    assert parse_corrections(["14=12", "a=b:3=5.5"]) == {"14": 12.0, "a=b:3": 5.5}


@pytest.mark.parametrize("text", ["14", "14=", "14=heavy", "=", "14=nan"])
def test_an_option_of_another_form_is_refused(text: str) -> None:
    """The form is shown."""
    with pytest.raises(SettingError, match="14=12"):
        parse_corrections([text])


def test_the_same_step_twice_is_refused() -> None:
    """Two masses for one step."""
    with pytest.raises(SettingError, match="twice"):
        parse_corrections(["14=12", "14=13"])


def test_a_step_that_stood_far_longer_is_noted_and_kept() -> None:
    """The book says one load stood 3 s where the others stood 6 s or so: said with step and time, not set aside."""
    good = session()
    step, _ = loaded_step(good)
    steps = good.steps.copy()
    mine = steps["step"] == step
    steps.loc[mine, "t_end_s"] = steps.loc[mine, "t_load_s"] + 2.6
    result = fit_sessions([replace(good, steps=steps)])
    assert any(f"step {step} at" in note and "stood 2.6 s" in note for note in result.notes)
    assert result.asides == ()
