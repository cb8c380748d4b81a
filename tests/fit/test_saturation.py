"""Ends of the range: a reading stuck at its top is recognised and left out, a dead band is said, both wirings fit."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from footcal.errors import SessionError
from footcal.files.session import Session
from footcal.fit.engine import FitResult, fit_sessions
from footcal.records import Health
from footcal.sim.bench import run_session
from footcal.sim.sensor_chain import SimulatedSensor
from footcal.sim.sensors import draw_sensor
from footcal.sim.trials import static_trial
from tests.simulated import as_session, converted

PARTS = ("presses", "cycles", "quick")
STOP_N = 180.0  # of 300 N: the top loads stick, the ones below do not


def session_of(kind: str, seed: int) -> tuple[SimulatedSensor, Session]:
    """A simulated foot and its session at one temperature."""
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    return sensor, as_session(run_session(sensor, rng, parts=PARTS))


def clipped(session: Session, share: float) -> tuple[Session, float]:
    """Cut the readings at a share of their way from zero to the highest load, as an amplifier at its rail does."""
    zero, top = np.median(session.raw[:60]), session.raw[np.argmax(np.abs(session.raw - session.raw[0]))]
    rail = float(np.rint(zero + share * (top - zero)))
    raw = np.minimum(session.raw, rail) if top > zero else np.maximum(session.raw, rail)
    return replace(session, raw=raw), rail


def saturated_note(result: FitResult) -> str:
    """What the file says of saturation."""
    return next((note for note in result.notes if note.startswith("saturated")), "")


@pytest.fixture(scope="module")
def cell() -> tuple[Session, float, FitResult]:
    """A cheap cell whose amplifier ends at 60 % of the range, not at the top of the converter."""
    session, rail = clipped(session_of("B", 100)[1], 0.6)
    return session, rail, fit_sessions([session])


def test_loads_that_stick_are_left_out_and_said(cell: tuple[Session, float, FitResult]) -> None:
    """No fitted row holds a sample at the rail; the note names the first load that stuck and the steps."""
    session, rail, result = cell
    rows = result.rows.kept(result.rows.target > 0.02)
    touched = [(result.data.channel.raw[a:b] == rail).any() for a, b in zip(rows.start, rows.stop, strict=True)]
    assert not any(touched)
    assert "steps" in saturated_note(result)
    assert (session.raw == rail).sum() > 100


def test_the_range_ends_below_the_loads_that_stick(cell: tuple[Session, float, FitResult]) -> None:
    """60 % of the counts are some 60 % of 0.96 of full scale (a nearly straight cell): the range ends below 180 N."""
    _, _, result = cell
    validity = result.calibration.file.validity
    assert 60.0 < validity.force_max_N < STOP_N
    assert result.data.saturated_from_N is not None
    assert validity.force_max_N < result.data.saturated_from_N


def test_what_is_left_is_calibrated_as_well_as_without_the_rail(cell: tuple[Session, float, FitResult]) -> None:
    """Left-out cycles within 0.1 % of full scale, twice the figure of a whole session of such a cell."""
    cycles = cell[2].calibration.file.figures.cycles
    assert cycles is not None
    assert cycles < 0.1


def test_a_reading_at_the_rail_is_flagged_at_run_time(cell: tuple[Session, float, FitResult]) -> None:
    """Bit 1, saturated, in `convert`; a reading well below it has no such bit."""
    session, rail, result = cell
    zero = float(np.median(session.raw[:60]))
    t_s = np.arange(4) * 0.0125
    flags = result.calibration.force(t_s, np.array([zero, zero, rail, rail])).flags
    assert ((flags & Health.SATURATED) != 0).tolist() == [False, False, True, True]


def test_a_whole_session_has_no_such_note() -> None:
    """Nothing sticks, nothing is said."""
    result = fit_sessions([session_of("B", 100)[1]])
    assert saturated_note(result) == ""
    assert result.data.saturated_from_N is None


def test_a_pad_at_the_top_of_its_converter_is_recognised() -> None:
    """A magnetic pad whose counts end at the converter's own top, given as raw_max."""
    session, rail = clipped(session_of("Q", 101)[1], 0.7)
    if rail < np.median(session.raw[:60]):
        session, rail = replace(session, raw=65535.0 - session.raw), 65535.0 - rail
    result = fit_sessions([replace(session, meta=replace(session.meta, raw_max=rail))])
    assert result.calibration.file.input.raw_max == rail
    assert result.calibration.file.validity.force_max_N < 0.9 * 400.0
    assert saturated_note(result)


def test_a_sensor_that_sticks_from_the_lowest_loads_on_is_refused() -> None:
    """A rail at 2 % of the range leaves no load to fit."""
    session, _ = clipped(session_of("B", 100)[1], 0.02)
    with pytest.raises(SessionError, match="saturated"):
        fit_sessions([session])


@pytest.mark.parametrize("wiring", ["pad_to_supply", "pad_to_ground"])
def test_both_divider_wirings_are_found_and_read_the_same(wiring: str) -> None:
    """One pad, its converter turned over: wiring taken from the first press, the force within 2 % of full scale.

    The counts of the two wirings add up to the converter's top (by hand: one measures across the pad, the other across
    the fixed resistor).
    """
    rng = np.random.default_rng(103)
    drawn = draw_sensor("P", rng)
    top, to_ground = drawn.raw_max, wiring == "pad_to_ground"
    gain = -top if to_ground else top
    sensor = replace(drawn, converter=replace(drawn.converter, offset=top if to_ground else 0.0, gain=gain))
    result = fit_sessions([as_session(run_session(sensor, np.random.default_rng(104), parts=PARTS))])
    file = result.calibration.file
    assert file.input.wiring == wiring
    t_s = np.arange(0.0, 8.0, 0.01)
    force_N = np.where(t_s < 2.0, 0.0, 150.0)
    raw = sensor.respond(t_s, force_N, 22.0, np.random.default_rng(105))
    read = result.calibration.force(t_s, raw, np.full(t_s.size, 22.0)).force_N
    assert np.mean(read[600:]) == pytest.approx(150.0, abs=0.02 * 250.0)


def test_the_dead_band_of_a_divider_pad_is_said() -> None:
    """Drawn with a dead band of 1 % of 250 N: named, and its width is right within a factor of two."""
    result = fit_sessions([session_of("P", 103)[1]])
    note = next(note for note in result.notes if note.startswith("dead_band"))
    width_N = float(note.split("some ")[1].split(" N")[0])
    assert 1.25 < width_N < 5.0


@pytest.mark.parametrize("kind", ["B", "Q", "R"])
def test_sensors_without_a_dead_band_do_not_claim_one(kind: str) -> None:
    """Cells, magnets and capacitors follow from the first newton on."""
    assert not any(note.startswith("dead_band") for note in fit_sessions([session_of(kind, 102)[1]]).notes)


def test_a_supply_that_wanders_is_covered_by_the_stated_uncertainty() -> None:
    """A divider whose supply wanders by 0.1 % against its reference, another day: 9 of 10 settled readings within U."""
    rng = np.random.default_rng(100)
    sensor = replace(draw_sensor("P", rng), supply_share=1e-3)
    result = fit_sessions([as_session(run_session(sensor, rng, parts=(*PARTS, "cold", "hot")))])
    trial = static_trial(sensor.day(rng), rng)
    force_N, u_N = converted(result.calibration, trial)
    scored = trial.scored > 0.0
    assert np.mean(np.abs(force_N - trial.force_N)[scored] <= 2.0 * u_N[scored]) >= 0.9
