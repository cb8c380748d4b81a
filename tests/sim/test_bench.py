"""Tests of the simulated bench session."""

from collections import Counter

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.sim.bench import PARTS, STATIC_ONLY, SimulatedSession, run_session
from footcal.sim.sensors import SimulatedSensor, draw_sensor


@pytest.fixture(scope="module")
def sensor() -> SimulatedSensor:
    """Return a magnetic pad."""
    return draw_sensor("Q", np.random.default_rng(7))


@pytest.fixture(scope="module")
def session(sensor: SimulatedSensor) -> SimulatedSession:
    """Return a full session of it."""
    return run_session(sensor, np.random.default_rng(8))


def window(session: SimulatedSession, row: int) -> np.ndarray:
    """Return which readings lie in a step's window."""
    t_s = session.readings["t_s"]
    return (t_s >= session.steps["t_start_s"][row]) & (t_s <= session.steps["t_end_s"][row])


def test_a_session_holds_what_a_good_session_holds(session: SimulatedSession) -> None:
    """Three presses, three cycles, 14 minor turns, a dozen quick lifts, a pump with six knocks, cold and hot."""
    kinds = Counter(session.steps["kind"])
    assert (kinds["press"], kinds["pump"], kinds["knock"], kinds["quick"]) == (3, 1, 6, 24)
    cycles = np.array(session.steps["cycle"])
    loaded = np.array(session.steps["direction"]) != "zero"
    per_cycle = [int(np.sum(loaded & (cycles == cycle))) for cycle in (1, 2, 3, 4, 7, 8)]
    assert per_cycle[3] == 14
    assert per_cycle[0] == per_cycle[1] == per_cycle[2] == per_cycle[4] == per_cycle[5] in {15, 17}
    assert 10.0 * 60.0 < session.readings["t_s"][-1] - 2 * 2400.0 < 20.0 * 60.0  # handling without the soaks


def test_temperatures_are_those_of_the_recipe(session: SimulatedSession) -> None:
    """22 °C first, then 8 °C and 38 °C, each after a gap in the readings."""
    t_s, temp_C = session.readings["t_s"], session.readings["temp_C"]
    edges = np.flatnonzero(np.diff(t_s) > 60.0)
    parts = np.split(temp_C, edges + 1)
    assert [part.mean() for part in parts] == pytest.approx([22.0, 8.0, 38.0], abs=1.0)


def test_the_true_force_is_the_weight_that_was_entered(session: SimulatedSession) -> None:
    """In every held window the true force is mass · g · (1 − 1.2/8000), for the masses are exact (by hand)."""
    for row, (kind, mass_kg) in enumerate(zip(session.steps["kind"], session.steps["mass_kg"], strict=True)):
        if kind in {"hold", "press"}:
            force_N = session.force_N[window(session, row)]
            assert force_N.size > 20
            assert (
                np.abs(force_N - mass_kg * 9.81 * (1.0 - 1.2 / 8000.0)).max() < 2e-4 * 400.0
            )  # the last of the ringing


def test_a_hold_starts_when_the_load_has_stopped(session: SimulatedSession) -> None:
    """`t_load_s` lies before the window and after the movement: the force is within 10 % of its change."""
    row = session.steps["direction"].index("up")
    t_load_s = session.steps["t_load_s"][row]
    assert t_load_s < session.steps["t_start_s"][row]
    at_N = session.history.force_N(np.array([t_load_s - 1.2, t_load_s]), sensed=False)
    final_N = session.force_N[window(session, row)][-1]
    assert at_N[0] < 0.1 * final_N
    assert at_N[1] == pytest.approx(final_N, rel=0.1)


def test_placements_scatter_as_the_sheet_says(sensor: SimulatedSensor) -> None:
    """What the sensor feels over what really presses scatters by the sheet's 0.25 % of the load (70 holds: 25 %)."""
    session = run_session(sensor, np.random.default_rng(9), parts=STATIC_ONLY)
    moves = [move for move in session.history.moves if move.to_N > 0.0]
    off = np.array([move.to_sensed_N / move.to_N - 1.0 for move in moves])
    assert off.std() == pytest.approx(0.0025, rel=0.25)


def test_the_counts_follow_the_force(session: SimulatedSession) -> None:
    """Counts and force of held loads at 22 °C are ranked alike (the loop is 6 %, the loads are further apart)."""
    rows = [
        row for row, kind in enumerate(session.steps["kind"]) if kind == "hold" and session.steps["cycle"][row] == 1
    ]
    raw = np.array([session.readings["raw"][window(session, row)].mean() for row in rows])
    force = np.array([session.force_N[window(session, row)].mean() for row in rows])
    up = np.argsort(force[: len(rows) // 2])
    assert (np.diff(raw[up]) * np.sign(raw[up][-1] - raw[up][0]) > 0.0).all()


@pytest.mark.parametrize("offset_s", [-0.015, 0.02])
@pytest.mark.parametrize("form", ["column", "file"])
def test_the_reference_clock_is_off_by_a_constant(sensor: SimulatedSensor, form: str, offset_s: float) -> None:
    """Moved back by the offset, the reference shows the true force to 0.2 % of full scale; without, much worse."""
    rng = np.random.default_rng(8)
    session = run_session(sensor, rng, parts=("pump",), reference=form, clock_offset_s=offset_s)
    shown_s = session.readings["t_s"] if session.reference is None else session.reference["t_ref_s"]
    ref_N = session.readings["ref_N"] if session.reference is None else session.reference["ref_N"]
    there = np.isfinite(ref_N)
    right_N = session.history.force_N(shown_s[there] - offset_s, sensed=False)
    wrong_N = session.history.force_N(shown_s[there], sensed=False)
    assert there.sum() > 3000
    assert np.sqrt(np.mean((ref_N[there] - right_N) ** 2)) < 0.002 * sensor.capacity_N
    assert np.sqrt(np.mean((ref_N[there] - wrong_N) ** 2)) > 0.01 * sensor.capacity_N


@pytest.mark.parametrize(("mount", "sign"), [("foot_down", -1.0), ("foot_up", 1.0)])
def test_the_mass_below_the_sensor_pulls_or_presses(sensor: SimulatedSensor, mount: str, sign: float) -> None:
    """Hanging, 0.4 kg below the sensor pull with 3.92 N at zero; standing on it they press (by hand)."""
    session = run_session(
        sensor, np.random.default_rng(8), parts=(), mount=mount, mass_below_sensor_kg=0.4, clock_offset_s=0.0
    )
    assert session.force_N[0] == pytest.approx(sign * 0.4 * 9.81, abs=1e-9)
    assert session.meta["mount"] == mount


def test_parts_can_be_left_out(sensor: SimulatedSensor) -> None:
    """A short session has one cycle and quick lifts, no pump, no reference and no gap."""
    session = run_session(sensor, np.random.default_rng(8), parts=("cycles", "quick"), cycles=1, rate_Hz=20.0)
    assert set(session.steps["kind"]) == {"hold", "quick"}
    assert max(session.steps["cycle"]) == 2
    assert "ref_N" not in session.readings
    assert np.diff(session.readings["t_s"]).max() < 0.06


def test_weights_of_a_class_press_a_little_differently(sensor: SimulatedSensor) -> None:
    """With a box of class M2 the entered masses stay nominal and the true force is off by up to 1.6e-4 (table 1)."""
    session = run_session(sensor, np.random.default_rng(8), parts=("cycles",), cycles=1, weight_class="M2")
    off = []
    for row, mass_kg in enumerate(session.steps["mass_kg"]):
        if mass_kg > 1.0:
            force_N = session.force_N[window(session, row)][-1]
            off.append(force_N / (mass_kg * 9.81 * (1.0 - 1.2 / 8000.0)) - 1.0)
    assert 1e-6 < np.abs(off).max() <= 1.7e-4


def test_the_same_seed_gives_the_same_session(sensor: SimulatedSensor, session: SimulatedSession) -> None:
    """Everything is drawn from the generator."""
    again = run_session(sensor, np.random.default_rng(8))
    assert np.array_equal(again.readings["raw"], session.readings["raw"])
    assert again.steps["t_start_s"] == session.steps["t_start_s"]


@pytest.mark.parametrize(
    "options",
    [{"parts": ("presses", "dance")}, {"mount": "upside"}, {"reference": "none"}],
    ids=lambda o: next(iter(o)),
)
def test_an_unknown_wish_is_refused(sensor: SimulatedSensor, options: dict[str, object]) -> None:
    """The message names the option and what it may be."""
    with pytest.raises(SettingError, match=f"run_session, {next(iter(options))}"):
        run_session(sensor, np.random.default_rng(8), **options)


def test_all_parts_have_a_name() -> None:
    """The static session is the full one without what is quick."""
    assert set(PARTS) - set(STATIC_ONLY) == {"quick", "pump"}
