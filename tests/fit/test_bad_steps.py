"""Faults of people and wires: found, told in words, set aside; and good steps left alone."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from threadpoolctl import threadpool_limits

from footcal.files.session import Session
from footcal.fit.bad_steps import without_bad_steps
from footcal.fit.hold_errors import HoldErrors, hold_errors, usual_scatter
from footcal.fit.inputs import FitInput, read_input
from footcal.fit.passes import Fitted
from footcal.fit.priors import prior_rows
from footcal.fit.rows import Rows
from footcal.fit.set_aside import Aside
from footcal.records import BoolArray, FloatArray
from footcal.sim.bench import run_session
from footcal.sim.faults import Fault, injected
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session

PARTS = ("presses", "cycles", "minor", "quick")


@pytest.fixture(autouse=True)
def _one_thread() -> Iterator[None]:
    """As fit_sessions does: the factors are small, and more threads only wait for each other."""
    with threadpool_limits(limits=1):
        yield


@cache
def faulty(kind: str, seed: int) -> tuple[Session, tuple[Fault, ...]]:
    """A session with two faults of each kind."""
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    size = max(0.02, 5.0 * sensor.placement_share)
    session, faults = injected(
        run_session(sensor, rng, parts=PARTS), sensor, rng, bumps=2, tugs=2, slow=1, wrong_masses=2, size_share=size
    )
    return as_session(session), faults


def read(session: Session) -> FitInput:
    """The session as the fit starts from it."""
    return read_input([session], kind=None, capacity_N=None, raw_max=None)


@cache
def searched(kind: str, seed: int) -> tuple[FitInput, Fitted, Rows, dict[int, Aside]]:
    """The search for bad steps, its asides by step number."""
    data = read(faulty(kind, seed)[0])
    fitted, rows, asides = without_bad_steps(data)
    return data, fitted, rows, {data.holds[aside.hold].step: aside for aside in asides}


@pytest.mark.parametrize("kind", ["B", "C", "Q", "R"])
def test_bumps_tugs_slow_loads_and_wrong_masses_are_set_aside_and_nothing_else(kind: str) -> None:
    """Sizes from 2 % of full scale, or five placement deviations; the simulator's labels tell what was done."""
    _, faults = faulty(kind, 140)
    assert set(searched(kind, 140)[3]) == {fault.step for fault in faults}


@pytest.mark.parametrize("kind", ["B", "Q"])
def test_the_reason_names_the_mass_that_fits(kind: str) -> None:
    """Entered less slip is the true mass; a tenth of the slip is allowed."""
    _, faults = faulty(kind, 140)
    data, _, _, asides = searched(kind, 140)
    entered_kg = {hold.step: hold.mass_kg for hold in data.holds}
    for fault in (fault for fault in faults if fault.kind == "wrong_mass"):
        aside = asides[fault.step]
        assert aside.fits_kg == pytest.approx(entered_kg[fault.step] - fault.size, abs=0.1 * abs(fault.size))
        assert f"{entered_kg[fault.step]:g} kg entered" in aside.reason


def test_a_bump_is_called_a_bump_and_its_time_is_told() -> None:
    """The time in words is the label's, within a fifth of a second: the foot of a half sine does not show."""
    _, faults = faulty("B", 140)
    asides = searched("B", 140)[3]
    for fault in (fault for fault in faults if fault.kind == "bump"):
        reason = asides[fault.step].reason
        assert reason.endswith(": bump")
        assert float(reason.split(" at ")[1].split(" s")[0]) == pytest.approx(fault.t_s, abs=0.2)


@pytest.mark.parametrize("kind", ["A", "P"])
def test_a_good_session_keeps_all_its_steps(kind: str) -> None:
    """No fault was put in."""
    rng = np.random.default_rng(141)
    data = read(as_session(run_session(draw_sensor(kind, rng), rng, parts=PARTS)))
    assert without_bad_steps(data)[2] == []


def test_a_load_still_swinging_is_called_ringing() -> None:
    """A decaying 3 Hz swing of 2 % of full scale, put into the readings of one hold."""
    rng = np.random.default_rng(142)
    session = as_session(run_session(draw_sensor("B", rng), rng, parts=PARTS))
    row = session.steps[(session.steps["kind"] == "hold") & (session.steps["mass_kg"] > 10.0)].iloc[3]
    after_s = session.t_s - row["t_start_s"]
    inside = (after_s >= 0.0) & (session.t_s <= row["t_end_s"])
    swing = np.where(inside, np.exp(-after_s.clip(0.0) / 1.5) * np.sin(2.0 * np.pi * 3.0 * after_s), 0.0)
    raw = session.raw + 0.02 * np.ptp(session.raw) * swing
    data = read(replace(session, raw=raw))
    asides = without_bad_steps(data)[2]
    assert [data.holds[aside.hold].step for aside in asides] == [int(row["step"])]
    assert "ringing" in asides[0].reason


def test_errors_left_out_are_those_of_a_fit_without_the_hold() -> None:
    """Against numpy's least squares with the same weights, solved anew without one hold."""
    data, robust, rows, _ = searched("B", 140)
    active = robust.terms.active()
    weight = rows.weight * robust.row_weight
    prior = prior_rows(active, robust.creep_rms)

    def solved(kept: BoolArray) -> FloatArray:
        root = np.sqrt(weight[kept])
        design = np.vstack([robust.features[kept][:, active] * root[:, None], prior])
        return np.linalg.lstsq(design, np.append(rows.target[kept] * root, np.zeros(len(prior))))[0]

    coefficients = np.zeros(len(active))
    coefficients[active] = solved(np.ones(len(weight), dtype=bool))
    fitted = replace(robust, coefficients=coefficients)
    errors = hold_errors(fitted, rows, data.channel, data.reading, rows)
    for k in (0, len(errors.index) // 2, len(errors.index) - 1):
        mine = rows.hold == errors.index[k]
        expected = np.mean(rows.target[mine] - fitted.features[mine][:, active] @ solved(~mine))
        assert errors.mean[k] == pytest.approx(expected, rel=1e-6, abs=1e-9)


def test_the_usual_scatter_is_that_of_normal_holds_and_unmoved_by_gross_faults() -> None:
    """Normal errors of 1e-3 + 5e-3 of the load (root of squares, by hand), a tenth of them off by 0.1."""
    rng = np.random.default_rng(7)
    load = np.linspace(0.0, 1.0, 400)
    true_sd = np.hypot(1e-3, 5e-3 * load)
    mean = rng.normal(0.0, true_sd)
    mean[::10] += 0.1
    made = HoldErrors(np.arange(400), mean, load, np.zeros(400, dtype=bool))
    assert usual_scatter(made, 1e-6)[[20, 380]] == pytest.approx(true_sd[[20, 380]], rel=0.45)
