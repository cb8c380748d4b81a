"""Makes everything in calib_data/ from fixed seeds: run by hand, its output is committed.

    python calib_data/make_calib_data.py

All of it is invented: footcal's own simulator stands behind it, no real sensor, robot or person.
"""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pyarrow as pa
import pyarrow.parquet as pq

from footcal.calfile import Calibration
from footcal.demo.feet import BENCH_DAY, FEET, DemoFoot, DISTAL_kg, mounted, sessions_of
from footcal.files.atomic import replacing
from footcal.files.session import Session, session_from_tables, write_session
from footcal.files.session_meta import meta_from_mapping
from footcal.fit.engine import fit_sessions
from footcal.sim.bench import SimulatedSession, run_session
from footcal.sim.gait import SimulatedRun, simulate
from footcal.sim.trials import check_session

HERE = Path(__file__).resolve().parent
SESSION_RATE_Hz = {"cell": 25.0, "pad": 25.0}
CHECK_RATE_Hz = 12.5
WALK_s = 7.0
WALK_SEED = 4203
NOTE = "invented data: made by footcal's simulator, no real sensor"
# Smallest step kept in the log, by the end of a column's name: what such converters and encoders resolve.
RESOLUTION = {"q": 2e-5, "dq": 2e-3, "i": 2e-3, "imu.q": 1e-5, "imu.w": 5e-4, "imu.a": 2e-3}


def main() -> None:
    """Make sessions, checks, calibrations and the walk."""
    calibrations = {}
    for foot in FEET:
        write_session(bench(foot), HERE / foot.foot_id / "session", ".csv.gz")
        if foot.sensor().sheet.transducer != "cell":
            write_session(pumping(foot), HERE / foot.foot_id / "pump", ".csv.gz")
        for week in range(1, foot.weeks + 1):
            write_session(check(foot, week), HERE / foot.foot_id / "checks" / f"week_{week:02d}", ".csv.gz")
        calibrations[foot.foot_id] = calibrated(foot)
        print(foot.foot_id, calibrations[foot.foot_id].file.figures)
    walk(calibrations)


def bench(foot: DemoFoot) -> Session:
    """Return the bench session of a foot: presses, two cycles, a minor loop, quick lifts, cold, hot."""
    sensor = foot.sensor()
    made = run_session(
        sensor,
        np.random.default_rng([foot.seed, 2]),
        foot_id=foot.foot_id,
        parts=("presses", "cycles", "minor", "quick", "cold", "hot"),
        mount="foot_up",
        mass_below_sensor_kg=DISTAL_kg,
        rate_Hz=SESSION_RATE_Hz["cell" if sensor.sheet.transducer == "cell" else "pad"],
        cycles=2,
        start_utc=BENCH_DAY.isoformat(),
    )
    return as_session(made)


def pumping(foot: DemoFoot) -> Session:
    """Return a pad's pumping by hand on a reference cell, with the knocks that join the two clocks."""
    made = run_session(
        foot.sensor(),
        np.random.default_rng([foot.seed, 3]),
        foot_id=foot.foot_id,
        parts=("pump",),
        mount="foot_up",
        mass_below_sensor_kg=DISTAL_kg,
        start_utc=(BENCH_DAY + dt.timedelta(hours=3)).isoformat(),
    )
    return as_session(made)


def check(foot: DemoFoot, week: int) -> Session:
    """Return a weekly check; the bad foot's span and loop drift from the third week on."""
    span = -0.007 * max(week - 3, 0) if foot.goes_bad else 0.0
    made = check_session(
        foot.sensor(),
        np.random.default_rng([foot.seed, 100 + week]),
        foot_id=foot.foot_id,
        span_change=span,
        rate_Hz=CHECK_RATE_Hz,
        start_utc=(BENCH_DAY + dt.timedelta(weeks=week)).isoformat(),
    )
    return as_session(made)


def as_session(made: SimulatedSession) -> Session:
    """Return a simulated session as files would hold it: milliseconds, whole counts."""
    readings = {name: np.round(values, 3) for name, values in made.readings.items()}
    return session_from_tables(
        meta_from_mapping(made.meta, "make_calib_data.py"), pd.DataFrame(readings), pd.DataFrame(made.steps)
    )


def calibrated(foot: DemoFoot) -> Calibration:
    """Return the calibration of the committed session, its date that of the session so that reruns are equal."""
    result = fit_sessions(sessions_of(foot, HERE))
    content: dict[str, Any] = result.calibration.file.model_dump(mode="json", exclude={"sha256"})
    content["provenance"]["made_utc"] = BENCH_DAY.isoformat()
    content["notes"].append(NOTE)
    return Calibration.from_content(content)


def walk(calibrations: dict[str, Calibration]) -> None:
    """Write log, truth and robot description of a walk on belt drives, and the four calibrations it names."""
    run = simulate(
        "walk",
        "belt",
        WALK_s,
        WALK_SEED,
        sensors={foot.leg: foot.on_robot(WALK_SEED) for foot in FEET},
        foot_ids=mounted(),
    )
    folder = HERE / "walk"
    metadata = {**run.metadata, "note": NOTE, "t0_utc": (BENCH_DAY + dt.timedelta(days=6)).isoformat()}
    write_columns(rounded(run), folder / "log.parquet", metadata)
    write_columns({k: tidy(k, v, 0.01) for k, v in run.truth.items()}, folder / "truth.parquet", metadata)
    with replacing(folder / "robot.toml") as temporary:
        temporary.write_text(run.robot_toml, encoding="utf-8")
    for foot_id, calibration in calibrations.items():
        calibration.save(folder / f"{foot_id}.cal.json")


def rounded(run: SimulatedRun) -> dict[str, np.ndarray]:
    """Return the log's columns with the steps that encoders and converters have."""
    return {name: tidy(name, values, step_of(name)) for name, values in run.log.items()}


def step_of(name: str) -> float:
    """Return the smallest step of a column; 0 leaves it as it is."""
    end = name.rsplit(".", maxsplit=1)[-1].rstrip("0123456789")
    return RESOLUTION.get(name[:5], RESOLUTION.get(end, 0.0))


def tidy(name: str, values: np.ndarray, step: float) -> np.ndarray:
    """Return a column rounded to a step, as float32; time stays float64."""
    if name == "t_s":
        return np.round(values, 6)
    return np.asarray(np.round(values / step) * step if step else values, dtype=np.float32)


def write_columns(columns: dict[str, np.ndarray], path: Path, metadata: dict[str, str]) -> None:
    """Write a Parquet file as small as its content allows."""
    table = pa.table(columns).replace_schema_metadata(metadata)
    with replacing(path) as temporary:
        pq.write_table(table, temporary, compression="zstd", compression_level=19, use_dictionary=True)


if __name__ == "__main__":
    main()
