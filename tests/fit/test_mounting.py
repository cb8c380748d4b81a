"""Zero and mounting, from bench to converted force: however the foot was mounted, zero is that of a massless foot."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from footcal.calfile import Calibration
from footcal.calfile.tare import find_tare
from footcal.fit.engine import fit_sessions
from footcal.records import NS_PER_S
from footcal.sim.bench import run_session
from footcal.sim.sensor_chain import SimulatedSensor
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session

BELOW_kg = 1.2
ANGLE_rad = 2.0


def sensor() -> SimulatedSensor:
    """A good cell, always the same."""
    return draw_sensor("A", np.random.default_rng(110))


def calibrated(mount: str) -> Calibration:
    """That cell, calibrated in one mount."""
    session = run_session(
        sensor(),
        np.random.default_rng(111),
        parts=("presses", "cycles"),
        mount=mount,
        mass_below_sensor_kg=BELOW_kg,
        mount_angle_rad=ANGLE_rad,
    )
    return fit_sessions([as_session(session)]).calibration


@pytest.mark.parametrize("mount", ["foot_up", "foot_down", "side", "angle"])
def test_every_mount_gives_the_force_of_a_massless_foot(mount: str) -> None:
    """11.8 N below the sensor, four mounts, one force: 200 N within 0.1 % of full scale; a wrong sign misses by 5 %."""
    t_s = np.arange(0.0, 6.0, 0.0125)
    raw = sensor().respond(t_s, np.full(t_s.size, 200.0), 22.0, np.random.default_rng(112))
    read_N = calibrated(mount).force(t_s, raw, np.full(t_s.size, 22.0)).force_N
    assert np.mean(read_N[200:]) == pytest.approx(200.0, abs=0.5)


def test_the_angle_is_kept_in_the_file(tmp_path: Path) -> None:
    """Written and read back, `mount` is angle and the angle is there."""
    calibrated("angle").save(tmp_path / "foot.cal.json")
    zero = Calibration.load(tmp_path / "foot.cal.json").file.zero
    assert (zero.mount, zero.mount_angle_rad, zero.mass_below_sensor_kg) == ("angle", ANGLE_rad, BELOW_kg)
    assert zero.stated_for == "massless foot"


def test_a_hanging_foot_tares_to_minus_its_weight_after_an_angled_bench() -> None:
    """Hanging, 1.2 kg pull with 11.8 N (by hand); the tare finds hardly anything to shift."""
    calibration = calibrated("angle")
    t_s = np.arange(0.0, 4.0, 0.0125)
    raw = sensor().respond(t_s, np.full(t_s.size, -BELOW_kg * 9.81), 22.0, np.random.default_rng(113))
    t_ns = np.rint(t_s * NS_PER_S).astype(np.int64)
    tare = find_tare(calibration, t_ns, raw, np.full(t_s.size, 22.0), "hanging")
    assert abs(tare.shift_N) < 0.5
