"""Masses that were entered wrongly, put right before the fit, and told in words ever after."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from footcal.errors import SettingError
from footcal.files.session import Session


@dataclass(frozen=True, slots=True)
class Correction:
    """One mass put right."""

    session: int  # index
    step: int
    entered_kg: float
    corrected_kg: float

    def words(self) -> str:
        """Return what was entered and what it became."""
        return f"step {self.step}: {self.entered_kg:g} kg entered, corrected to {self.corrected_kg:g} kg"


def parse_corrections(texts: Sequence[str]) -> dict[str, float]:
    """Return `STEP=KG` or `SESSION:STEP=KG`, as the command line gives them, as a mapping for `fit_sessions`.

    Raises:
        SettingError: a text of another form, a mass that is no positive number, a step named twice.

    >>> parse_corrections(["14=12", "2031-04-02:3=5.5"])
    {'14': 12.0, '2031-04-02:3': 5.5}
    """
    found: dict[str, float] = {}
    for text in texts:
        step, equals, mass = text.rpartition("=")
        try:
            mass_kg = float(mass)
        except ValueError:
            mass_kg = float("nan")
        if not equals or not np.isfinite(mass_kg):
            raise SettingError(
                "--correct-mass", f"{text!r} is not STEP=KG", "Write for example 14=12, or week_01:14=12."
            )
        if step in found:
            raise SettingError("--correct-mass", f"step {step} is given twice", "Give one mass a step.")
        found[step] = mass_kg
    return found


def corrected(
    sessions: Sequence[Session], correct_mass: Mapping[int, float] | Mapping[str, float]
) -> tuple[tuple[Session, ...], tuple[Correction, ...]]:
    """Return the sessions with these masses in place of the entered ones; the sessions given are not changed.

    Args:
        sessions: read.
        correct_mass: mass in kilograms by step number, or by "SESSION:STEP" where there are several sessions;
            SESSION is a name, or the place in the list from 1.

    Raises:
        SettingError: no such session or step, a step without a mass, a mass that is not positive.
    """
    done = list(sessions)
    corrections = []
    for key, mass_kg in correct_mass.items():
        number, step = _place(sessions, str(key))
        steps = done[number].steps.copy()
        mine = steps.index[steps["step"] == step]
        where = f"--correct-mass {key}"
        if len(mine) == 0:
            last = int(steps["step"].max()) if len(steps) else 0
            raise SettingError(where, f"{done[number].name} has no step {step}", f"Its steps go up to {last}.")
        row = steps.loc[mine[0]]
        entered_kg = float(row["mass_kg"])
        if row["direction"] == "zero" or not np.isfinite(entered_kg) or np.isfinite(float(row["load_N"])):
            raise SettingError(where, "this step has no mass", "Only a step with a mass on it can be corrected.")
        if not (np.isfinite(mass_kg) and mass_kg > 0.0):
            raise SettingError(where, f"{mass_kg:g} kg is not a positive mass", "Give kilograms.")
        steps.loc[mine[0], "mass_kg"] = float(mass_kg)
        done[number] = replace(done[number], steps=steps)
        corrections.append(Correction(number, step, entered_kg, float(mass_kg)))
    return tuple(done), tuple(corrections)


def _place(sessions: Sequence[Session], key: str) -> tuple[int, int]:
    """Return session index and step number of a key."""
    name, colon, text = key.rpartition(":")
    where = f"--correct-mass {key}"
    if not text.strip().isdigit():
        raise SettingError(where, f"{text!r} is not a step number", "Write STEP=KG, or SESSION:STEP=KG.")
    if not colon:
        if len(sessions) > 1:
            mend = f"Write SESSION:{text}=KG; the sessions are {', '.join(session.name for session in sessions)}."
            raise SettingError(where, "it is not said in which of several sessions", mend)
        return 0, int(text)
    named = [number for number, session in enumerate(sessions) if session.name == name]
    if not named and name.isdigit() and 1 <= int(name) <= len(sessions):  # its place, where names do not tell
        named = [int(name) - 1]
    if len(named) != 1:
        names = ", ".join(session.name for session in sessions)
        what = f"there is no session {name!r}" if not named else f"several sessions are named {name!r}"
        raise SettingError(where, what, f"The sessions are {names}.")
    return named[0], int(text)
