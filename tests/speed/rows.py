"""What is measured, and against what."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from filterpy.kalman import IMMEstimator, KalmanFilter
from numpy.typing import NDArray
from sklearn.linear_model import LinearRegression
from sklearn.model_selection import LeaveOneGroupOut, cross_val_predict
from threadpoolctl import threadpool_limits

from footcal.files.robot_log import read_robot_log
from footcal.fit.least_squares import solve_without_each, triangle
from footcal.fusion.engine import Fusion
from footcal.fusion.entry import batch, tick
from footcal.leg import Robot
from footcal.recipe.data import data_dir
from footcal.sensor.compensator import Compensator
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH, play_columns
from tests.sensor.models import with_memory
from tests.speed.timing import medians_s


@dataclass(frozen=True)
class Row:
    """One line of the table."""

    what: str
    gate: float
    measure: Callable[[], tuple[float, str]]
    at_least: bool = True


def plays_against_numpy_loop() -> tuple[float, str]:
    """Our compiled play features over a NumPy loop in time, 6 operators."""
    n = 20_000
    t_ns = np.arange(n, dtype=np.int64) * 1_000_000
    v = np.sin(np.arange(n) * 0.01)
    h = np.array(PLAY_HALF_WIDTH)

    def loop() -> None:
        state = v[0] + h
        for value in v:
            state = np.maximum(value - h, np.minimum(value + h, state))

    ours, theirs = medians_s([lambda: play_columns(t_ns, v), loop])
    return theirs / ours, f"{1e9 * ours / n:.0f} ns against {1e9 * theirs / n:.0f} ns a sample"


def convert_per_sample() -> tuple[float, str]:
    """The whole compensator over one `numpy.interp` table look-up a sample (the least a calibration could do)."""
    n = 200_000
    t_ns = np.arange(1, n + 1, dtype=np.int64) * 1_000_000
    raw = 400.0 - 390.0 * np.cos(t_ns * 1e-9 * 5.0)
    temp = np.full(n, 25.0)
    grid = np.linspace(-100.0, 1000.0, 64)

    def ours() -> None:
        Compensator(with_memory()).run(t_ns, raw, temp)

    our_s, their_s = medians_s([ours, lambda: np.interp(raw, grid, grid)])
    return our_s / their_s, f"{1e6 * our_s / n:.3f} us a sample (figure to reach 0.5 us)"


def leave_out_against_sklearn() -> tuple[float, str]:
    """Leave-one-cycle-out by merged factors over scikit-learn's LeaveOneGroupOut on the same matrix."""
    rng = np.random.default_rng(7)
    rows, columns, groups = 40_000, 32, 40
    design = rng.normal(size=(rows, columns))
    target = design @ rng.normal(size=columns) + 0.1 * rng.normal(size=rows)
    group = np.repeat(np.arange(groups), rows // groups)

    def ours() -> None:
        factors = [triangle(design[group == g], target[group == g]) for g in range(groups)]
        for g, solved in enumerate(solve_without_each(factors, np.zeros((columns + 1, columns + 1)))):
            design[group == g] @ solved

    def theirs() -> None:
        cross_val_predict(LinearRegression(fit_intercept=False), design, target, groups=group, cv=LeaveOneGroupOut())

    with threadpool_limits(limits=1):
        our_s, their_s = medians_s([ours, theirs], repeats=5)
    return their_s / our_s, f"{1e3 * our_s:.0f} ms against {1e3 * their_s:.0f} ms"


@dataclass(frozen=True)
class Walk:
    """The demo walk as input records, and a fusion for it."""

    fusion: Fusion
    rows: NDArray[np.void]

    def singles(self) -> list[NDArray[np.void]]:
        """Each row as the one-element array that the step takes."""
        return [self.rows[i : i + 1] for i in range(len(self.rows))]


def _walk() -> Walk:
    folder = data_dir("calib_data") / "walk"
    robot = Robot.load(folder / "robot.toml")
    log = read_robot_log(folder / "log.parquet", robot.leg_names, robot.joint_counts)
    fusion = Fusion.load(folder / "robot.toml")
    return Walk(fusion, fusion.input_rows(log)[:400])


def _tick_by_tick(walk: Walk) -> Callable[[], None]:
    """The compiled step called from Python, a tick at a time, on the fusion's own arrays."""
    fusion, singles = walk.fusion, walk.singles()
    gravity, state, constants, out = fusion._gravity, fusion._S, fusion._C, fusion._out

    def run() -> None:
        fusion.restart()
        for row in singles:
            tick(row, gravity, state, constants, out)

    return run


def _filterpy_imm(legs: int, states: int, modes: int, measurements: int) -> Callable[[], None]:
    """The IMM part alone of a filter of the same size, one per leg, one tick."""
    rng = np.random.default_rng(7)
    banks = []
    for _ in range(legs):
        filters = []
        for _ in range(modes):
            kf = KalmanFilter(dim_x=states, dim_z=measurements)
            kf.F, kf.Q, kf.P = np.eye(states) * 0.99, np.eye(states) * 0.01, np.eye(states)
            kf.H, kf.R = rng.normal(size=(measurements, states)), np.eye(measurements)
            filters.append(kf)
        move = np.full((modes, modes), 0.01) + np.eye(modes) * (1.0 - 0.01 * modes)
        banks.append(IMMEstimator(filters, np.full(modes, 1.0 / modes), move))
    z = np.zeros(measurements)

    def tick() -> None:
        for bank in banks:
            bank.predict()
            bank.update(z)

    return tick


def fusion_against_filterpy() -> tuple[float, str]:
    """Filterpy's IMM step alone (10 states, 3 modes, 4 legs) over our whole step called from Python."""
    walk = _walk()
    their_tick = _filterpy_imm(4, 10, 3, 4)
    our_s, their_s = medians_s([_tick_by_tick(walk), lambda: [their_tick() for _ in range(20)]])
    ours_us, theirs_us = 1e6 * our_s / len(walk.rows), 1e6 * their_s / 20
    return theirs_us / ours_us, f"{ours_us:.1f} us against {theirs_us:.0f} us a tick"


def step_against_batch() -> tuple[float, str]:
    """Our step called from Python over the same step in a batch."""
    walk = _walk()
    fusion = walk.fusion
    out = np.zeros(len(walk.rows), dtype=fusion._out.dtype)

    def whole() -> None:
        fusion.restart()
        batch(walk.rows, fusion._gravity, fusion._S, fusion._C, out)

    one_s, all_s = medians_s([_tick_by_tick(walk), whole])
    return one_s / all_s, f"{1e6 * one_s / len(out):.1f} us against {1e6 * all_s / len(out):.1f} us a tick"


ROWS = (
    Row("play features: NumPy loop in time / ours", 100.0, plays_against_numpy_loop),
    Row("compensator / one table look-up", 60.0, convert_per_sample, at_least=False),
    Row("leave-one-cycle-out: scikit-learn / ours", 30.0, leave_out_against_sklearn),
    Row("fusion step from Python: filterpy's IMM alone / ours", 200.0, fusion_against_filterpy),
    Row("fusion: step from Python / batch", 3.0, step_against_batch, at_least=False),
)
