"""The swing zeros of a walk as extra data: between two steps the foot carries nothing, and what it reads then is known.

A bench session of slow holds says little about the first tenths of a second after unloading; a minute of walking says
it sixty times. The swings are found with a first calibration and enter the fit as reference data whose force is known:
that of the hanging foot.
"""

from __future__ import annotations

import os
from dataclasses import replace
from itertools import pairwise
from typing import Final

import numpy as np
import pandas as pd

from footcal.calfile import Calibration
from footcal.errors import SessionError, SettingError
from footcal.files.robot_log import RobotLog, read_robot_log
from footcal.files.session import Session, session_from_tables
from footcal.files.session_meta import SessionMeta
from footcal.fit.holds import bench_place
from footcal.fit.inputs import FitInput
from footcal.fit.outcome import FitResult
from footcal.fit.robust import SWING
from footcal.fit.rows import Rows, pump_rows
from footcal.records import BoolArray, FloatArray

LOADED_SHARE: Final = 0.25  # of the walk's usual peak: above this the foot stands
AIR_SHARE: Final = 0.08  # below this it may be in the air
SHORTEST_s: Final = 0.12
AFTER_LIFT_s: Final = 0.04  # the foot may still drag
BEFORE_TOUCH_s: Final = 0.03
FEWEST: Final = 8
SERIES: Final = "swing"


def swing_session(calibration: Calibration, log: RobotLog, leg: str, meta: SessionMeta) -> Session:
    """Return a walk as a session whose steps are the foot's swings: zeros of the series `swing`.

    Args:
        calibration: a first one, of the same foot; it only has to tell standing from swinging.
        log: of a walk, the foot's own channel.
        leg: where the foot was mounted.
        meta: of the foot's bench session; the foot is taken to hang while it swings.

    Raises:
        SessionError: fewer than eight swings are found.
    """
    lane = log.legs.index(leg)
    known = np.isfinite(log.raw[:, lane])
    t_s, raw, temp_C = log.t_s[known], log.raw[known, lane], log.temp_C[known, lane]
    windows = swings_s(t_s, calibration.force(t_s, raw, temp_C).force_N)
    if len(windows) < FEWEST:
        raise SessionError(
            f"log, leg {leg}",
            f"{len(windows)} swings were found, at least {FEWEST} are needed",
            "Give a minute of walking or trotting in which the foot leaves the ground.",
        )
    steps = pd.DataFrame(
        {
            "step": np.arange(1, len(windows) + 1),
            "cycle": 1,
            "direction": "zero",
            "kind": "pump",  # many samples of known force, not one settled hold
            "series": SERIES,
            "t_start_s": [first for first, _ in windows],
            "t_end_s": [last for _, last in windows],
            "mass_kg": 0.0,
        }
    )
    readings = pd.DataFrame({"t_s": t_s, "raw": raw, "temp_C": temp_C})
    if not np.isfinite(temp_C).any():
        readings = readings.drop(columns="temp_C")
    mount = None if meta.mount is None else "foot_down"
    return session_from_tables(replace(meta, mount=mount, mount_angle_rad=None, weights=()), readings, steps)


def read_swings(result: FitResult, log: str | os.PathLike[str], leg: str | None) -> Session:
    """Return the swings of a logged walk as a session of the foot that was just fitted.

    Args:
        result: a first fit of the foot.
        log: .parquet, .csv or .csv.gz with `<leg>.raw`.
        leg: where the foot was mounted.

    Raises:
        SettingError: no leg was named.
        FileFormatError: the log can't be read, or lacks the leg.
        SessionError: too few swings.
    """
    if leg is None:
        raise SettingError("--swing", "the log holds several legs", "Name the leg that carried the foot with --leg.")
    walk = read_robot_log(log, [leg], [0])
    return swing_session(result.calibration, walk, leg, result.data.sessions[0].meta)


def swing_rows(data: FitInput) -> Rows | None:
    """Return the rows of all swings in the sessions, each with the force of the hanging foot; None without any."""
    windows: list[tuple[float, float]] = []
    force_N = np.full(len(data.channel.t_ns), np.nan)
    for number, session in enumerate(data.sessions):
        swings = session.steps[session.steps["series"] == SERIES]
        offset_s = float(data.channel.offset_s[number])
        windows += [(a + offset_s, b + offset_s) for a, b in zip(swings["t_start_s"], swings["t_end_s"], strict=True)]
        force_N[data.channel.session == number] = bench_place(session.meta).zero_N
    if not windows:
        return None
    rows = pump_rows(data.channel, windows, force_N, data.capacity_N)
    return replace(rows, hold=np.full(len(rows.hold), SWING))


def swings_s(t_s: FloatArray, force_N: FloatArray) -> list[tuple[float, float]]:
    """Return first and last time of each swing: low between two stances, its ends cut off.

    Args:
        t_s: shape (n,), seconds.
        force_N: shape (n,), axial force as first calibrated.
    """
    peak_N = float(np.quantile(force_N, 0.95))
    low = force_N < AIR_SHARE * peak_N
    edges = np.flatnonzero(np.diff(low.astype(int)))
    windows = []
    for first, last in pairwise(edges):
        if not low[first + 1]:
            continue
        start_s, end_s = float(t_s[first + 1]) + AFTER_LIFT_s, float(t_s[last]) - BEFORE_TOUCH_s
        if end_s - start_s >= SHORTEST_s - AFTER_LIFT_s and _stood_before(force_N, low, int(first), peak_N):
            windows.append((start_s, end_s))
    return windows


def _stood_before(force_N: FloatArray, low: BoolArray, edge: int, peak_N: float) -> bool:
    """Whether the stretch that ends at an edge really was a stance."""
    before = np.flatnonzero(low[:edge])
    start = int(before[-1]) + 1 if len(before) else 0
    return bool(np.max(force_N[start : edge + 1]) > LOADED_SHARE * peak_N)
