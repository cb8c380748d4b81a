"""Simulated gaits: momentum, torques, truth and description agree with each other and with hand-made references."""

from __future__ import annotations

import tomllib
from functools import lru_cache

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.gait import SimulatedRun, simulate
from footcal.sim.gait_motions import MOTIONS
from footcal.sim.robot import LEGS
from tests.sim.urdf_chain import Chain


@lru_cache(maxsize=16)
def run(motion: str, drive: str = "belt", mirrored: bool = False, duration_s: float = 6.0) -> SimulatedRun:  # noqa: FBT001, FBT002
    """Simulate once for all tests that look at the same run."""
    return simulate(motion, drive, duration_s, seed=7, rear_knees_mirrored=mirrored)  # type: ignore[arg-type]


def forces_W_N(r: SimulatedRun) -> FloatArray:
    """Return ground forces, (4, 3, n), world frame."""
    return np.array([[r.inner[f"{leg}.f{a}_W_N"] for a in "xyz"] for leg in LEGS])


@pytest.mark.parametrize("motion", list(MOTIONS))
def test_a_run_has_every_column_and_no_nan(motion: str) -> None:
    """All columns of the robot log are there, of one length, and finite."""
    r = run(motion)
    wanted = {"t_s", *(f"imu.q{c}" for c in "wxyz"), *(f"imu.{q}{c}" for q in "wa" for c in "xyz")}
    for leg in LEGS:
        wanted |= {f"{leg}.raw", f"{leg}.temp_C"} | {
            f"{leg}.{k}{j}" for k in ("q", "dq", "i", "motor_temp_C") for j in range(3)
        }
    assert set(r.log) == wanted
    assert set(r.truth) == {"t_s"} | {f"{leg}.{k}" for leg in LEGS for k in ("fx_N", "fy_N", "fz_N", "contact")}
    assert {v.shape for v in (*r.log.values(), *r.truth.values())} == {(6000,)}
    assert all(np.all(np.isfinite(v)) for v in (*r.log.values(), *r.truth.values()))


@pytest.mark.parametrize("motion", ["stand", "walk", "trot"])
def test_mean_vertical_force_is_the_weight(motion: str) -> None:
    """Over many steps the ground carries the weight: what momentum the start gains is below 0.5 %."""
    r = run(motion)
    mean_N = float(forces_W_N(r)[:, 2].sum(axis=0).mean())
    # Reference, by hand: 18.0 kg * 9.81 m/s^2 = 176.6 N; the drawn robot is within 40 g of 18 kg.
    assert mean_N == pytest.approx(r.robot.true.mass_kg * 9.81, rel=0.005)
    assert r.robot.true.mass_kg == pytest.approx(18.0, abs=0.05)


@pytest.mark.parametrize("motion", ["walk", "trot", "push"])
def test_forces_move_the_centre_of_mass(motion: str) -> None:
    """Ground forces and push less weight are mass times acceleration of the centre of mass (Newton)."""
    r = run(motion)
    com = np.array([r.inner[f"com.{a}_m"] for a in "xyz"])
    accel = (com[:, 2:] - 2.0 * com[:, 1:-1] + com[:, :-2]) / 1e-6
    total = forces_W_N(r).sum(axis=0)[:, 1:-1]
    total += np.array([r.inner[f"push.{a}_N"] for a in "xyz"])[:, 1:-1]
    total[2] -= r.robot.true.mass_kg * 9.81
    rms = np.sqrt(np.mean((total - r.robot.true.mass_kg * accel) ** 2, axis=1))
    assert np.all(rms < 0.3)  # 0.2 % of body weight: what the iteration leaves when both feet of a trot are nearly free


@pytest.mark.parametrize("motion", ["stand", "walk", "trot", "push"])
def test_moments_about_the_centre_of_mass_nearly_balance(motion: str) -> None:
    """What is left of the moment balance is under 0.35 N m rms, 0.2 % of weight times 1 m."""
    r = run(motion)
    left = np.array([r.inner[f"surplus_moment.{a}_Nm"] for a in "xyz"])
    assert np.all(np.sqrt(np.mean(left**2, axis=1)) < 0.35)


def test_feet_only_push_and_stay_inside_the_friction_cone() -> None:
    """No foot pulls; side force is below friction times normal force (0.6, the simulator's floor)."""
    force = forces_W_N(run("trot"))
    assert force[:, 2].min() >= 0.0
    assert np.all(np.hypot(force[:, 0], force[:, 1]) <= 0.65 * force[:, 2] + 0.1)


def test_forces_begin_and_end_without_a_jump() -> None:
    """At 1 kHz no foot force changes by more than 40 N in a sample; the first sample of a contact is below 12 N."""
    for motion in ("walk", "trot"):
        up = forces_W_N(run(motion))[:, 2]
        assert np.abs(np.diff(up, axis=1)).max() < 40.0
        for leg in up:
            loaded = leg > 0.01
            lately = np.convolve(loaded, np.r_[0.0, np.ones(20)])[: leg.size] > 0.5  # in the 20 ms before
            first = np.flatnonzero(loaded & ~lately)[1:]
            assert leg[first].max(initial=0.0) < 12.0


@pytest.mark.parametrize("mirrored", [False, True])
def test_static_torques_are_gravity_less_jacobian_transposed_force(mirrored: bool) -> None:  # noqa: FBT001
    """Standing still, joint torque = gravity torque - J' F, J by finite differences of a chain read from robot.toml.

    The chain (urdf_chain.py) is written from the URDF rules alone and shares nothing with the simulator. It is built
    from the maker's numbers, so 2 % of mass and 3 mrad of encoder zero are the tolerance.
    """
    r = run("stand", mirrored=mirrored)
    sample = 100  # before the first shift of weight
    chain = Chain(tomllib.loads(r.robot_toml))
    up = chain.gravity_direction(r, sample)
    for leg in LEGS:
        q = chain.joint_rad(r.log, leg, sample)
        jacobian = chain.jacobian(leg, q)
        force = np.array([r.truth[f"{leg}.f{a}_N"][sample] for a in "xyz"])
        wanted = chain.gravity_torque(leg, q, up) - jacobian.T @ force
        got = np.array([r.inner[f"{leg}.load_Nm{j}"][sample] for j in range(3)])
        assert got == pytest.approx(wanted, abs=0.2)


@pytest.mark.parametrize("mirrored", [False, True])
def test_description_and_encoders_put_the_feet_where_they_are(mirrored: bool) -> None:  # noqa: FBT001
    """Foot balls from encoders and robot.toml stand on the ground: all four within 3 mm of its radius."""
    r = run("stand", mirrored=mirrored)
    chain = Chain(tomllib.loads(r.robot_toml))
    for sample in (100, 3000):
        rotation = chain.attitude(r, sample)
        for leg in LEGS:
            ball = rotation @ chain.ball_m(leg, chain.joint_rad(r.log, leg, sample)) + [
                r.inner[f"body.{a}_m"][sample] for a in "xyz"
            ]
            assert ball[2] == pytest.approx(0.0185, abs=0.003)


def test_imu_reads_gravity_upwards_at_rest() -> None:
    """Specific force at rest is +9.81 m/s^2 along the unit's z (mounting turned about z only), gyro near zero."""
    r = run("stand")
    still = slice(0, 150)
    # Bias 0.04 m/s^2 per axis (1 sd) is the tolerance.
    assert np.mean(r.log["imu.az"][still]) == pytest.approx(9.81, abs=0.15)
    assert abs(np.mean(r.log["imu.ax"][still])) < 0.15
    assert abs(np.mean(r.log["imu.wz"][still])) < 0.012


def test_imu_axes_follow_its_mounting() -> None:
    """The unit is turned by +90 degrees about z: its x lies along body y, so its gyro x reads the pitch rate."""
    r = run("stand")
    pitch_rate = np.gradient(r.inner["body.pitch_rad"], 1e-3)
    assert np.corrcoef(r.log["imu.wx"], pitch_rate)[0, 1] > 0.98


def test_left_and_right_hips_are_mirrored() -> None:
    """Standing, abduction torque has the same sign and the same arm on both sides, since both count outwards."""
    r = run("stand")
    for side in ("left", "right"):
        torque, up = (np.mean(r.inner[f"front_{side}.{k}"][:150]) for k in ("load_Nm0", "fz_W_N"))
        # By hand: the ground pushes up 0.08 m outwards of the hip; links hang 0.02, 0.058 and 0.08 m outwards.
        # 0.3 N m cover side force (3 N at 0.32 m), roll of the ball and what the drawn robot differs from its drawing.
        assert torque == pytest.approx(-0.08 * up + 9.81 * (0.55 * 0.02 + 0.74 * 0.058 + 0.23 * 0.08), abs=0.3)


def test_truth_is_in_the_body_frame_and_says_so() -> None:
    """Body-frame truth turned by the true attitude gives the world forces."""
    r = run("trot")
    assert r.metadata["frame"] == "body"
    chain = Chain(tomllib.loads(r.robot_toml))
    for sample in range(1000, 6000, 500):
        rotation = chain.attitude(r, sample)
        body = np.array([r.truth[f"rear_left.f{a}_N"][sample] for a in "xyz"])
        world = np.array([r.inner[f"rear_left.f{a}_W_N"][sample] for a in "xyz"])
        assert rotation @ body == pytest.approx(world, abs=1e-9)


def test_axial_force_is_ground_force_along_the_leaning_shank() -> None:
    """Standing still, the ideal reading is F along the leaning sensor axis less the weight below the sensor."""
    r = run("stand")
    chain = Chain(tomllib.loads(r.robot_toml))
    for leg in LEGS:
        axis = chain.sensor_axis(leg, chain.joint_rad(r.log, leg, 100))
        force = np.array([r.truth[f"{leg}.f{a}_N"][100] for a in "xyz"])
        # By hand: 0.062 kg * 9.81 * cos(38 deg) = 0.48 N. Tolerance: the true axis is 1 degree off at most.
        assert r.log[f"{leg}.raw"][100] == pytest.approx(axis @ force - 0.48, abs=1.2)
        assert 33.0 < np.degrees(np.arccos(axis[2])) < 42.0


def test_a_foot_that_hangs_at_rest_pulls_at_its_sensor() -> None:
    """Zero is stated for a massless foot, so a hanging foot reads minus its weight along the axis."""
    r = run("hang")
    for leg in LEGS:
        assert np.mean(r.log[f"{leg}.raw"][:200]) == pytest.approx(-0.062 * 9.81 * np.cos(np.radians(37.0)), abs=0.12)
        assert not r.truth[f"{leg}.contact"].any()


def test_the_same_seed_gives_the_same_run() -> None:
    """Two runs of one seed are equal to the last bit; another seed differs."""
    first, again, other = (simulate("trot", "screw", 1.5, seed) for seed in (1, 1, 2))
    assert all(np.array_equal(first.log[name], again.log[name]) for name in first.log)
    assert not np.array_equal(first.log["front_left.raw"], other.log["front_left.raw"])


def test_a_slow_converter_sends_the_mean_of_its_window_once() -> None:
    """At 80 readings a second, 1000 rows hold 80 readings, the rest is NaN; the mean over the log is kept."""
    fast, slow = (simulate("stand", "belt", 2.0, 3, foot_rate_Hz=rate) for rate in (None, 80.0))
    raw = slow.log["rear_right.raw"]
    assert np.count_nonzero(np.isfinite(raw)) == 160
    assert np.nanmean(raw) == pytest.approx(np.mean(fast.log["rear_right.raw"]), rel=1e-3)
    assert tomllib.loads(slow.robot_toml)["leg"][0]["foot"]["sample_rate_Hz"] == 80.0


@pytest.mark.parametrize(
    "change",
    [{"motion": "fly"}, {"drive": "rope"}, {"duration_s": 0.0}, {"duration_s": float("nan")}, {"rate_Hz": 10.0}],
)
def test_settings_out_of_range_are_refused(change: dict[str, object]) -> None:
    """Unknown motion or drive, no duration, too few rows a second: SettingError that says what to give."""
    given: dict[str, object] = {"motion": "stand", "drive": "belt", "duration_s": 2.0, "seed": 1} | change
    with pytest.raises(SettingError):
        simulate(**given)  # type: ignore[arg-type]
