"""A straight-line calibration, check sessions of a straight-line foot, and stored checks, all with known answers."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from footcal.drift.limits import drift_limits
from footcal.drift.records import CheckScore, LoadCheck, NewCheck, StoredCheck
from footcal.files.session import Session, session_from_tables
from footcal.files.session_meta import SessionMeta
from footcal.records import FloatArray

START = dt.datetime(2031, 4, 2, 8, 0, tzinfo=dt.UTC)
COUNTS_per_N = 100.0


@dataclass(frozen=True)
class LineForce:
    """What the straight line reads."""

    force_N: FloatArray


@dataclass(frozen=True)
class LineCalibration:
    """raw = 100 counts per newton, the same uncertainty everywhere."""

    foot_id: str = "LC-1"
    digest: str = "c" * 64
    kind: str = "cell"
    capacity_N: float = 500.0
    u_N: float = 0.5

    def force(self, t_s: FloatArray, raw: FloatArray, temp_C: FloatArray | None = None) -> LineForce:
        """Divide by the counts per newton."""
        del t_s, temp_C
        return LineForce(raw / COUNTS_per_N)

    def u_static_N(self, force_N: FloatArray) -> FloatArray:
        """Return one figure for all forces."""
        return np.full_like(force_N, self.u_N)


def check_session(
    *,
    zero_N: float = 0.0,
    span_pct: float = 0.0,
    loop_N: float = 0.0,
    noise_N: float = 0.0,
    foot_id: str | None = "LC-1",
    loads_N: Sequence[float] = (0.0, 100.0, 200.0, 400.0, 200.0, 100.0, 0.0),
    kinds: Sequence[str] | None = None,
    seed: int = 7,
) -> Session:
    """Return a check at 50 Hz, 10 s a load, of a foot that is off by known amounts; unloading reads `loop_N` more."""
    rng = np.random.default_rng(seed)
    t_s = np.arange(0.0, 10.0 * len(loads_N), 0.02)
    index = np.minimum((t_s / 10.0).astype(int), len(loads_N) - 1)
    top = int(np.argmax(loads_N))
    directions = ["zero" if load == 0 else "up" if k <= top else "down" for k, load in enumerate(loads_N)]
    reads_N = [
        zero_N + load * (1 + span_pct / 100) + (loop_N if way == "down" else 0.0)
        for load, way in zip(loads_N, directions, strict=True)
    ]
    raw = COUNTS_per_N * (np.array(reads_N)[index] + noise_N * rng.normal(size=len(t_s)))
    steps = pd.DataFrame(
        {
            "step": np.arange(1, len(loads_N) + 1),
            "cycle": 1,
            "direction": directions,
            "t_start_s": 10.0 * np.arange(len(loads_N)) + 4.0,
            "t_end_s": 10.0 * np.arange(len(loads_N)) + 9.5,
            "load_N": loads_N,
            "kind": kinds or "hold",
        }
    )
    return session_from_tables(
        SessionMeta(foot_id=foot_id, start_utc=START), pd.DataFrame({"t_s": t_s, "raw": raw}), steps
    )


def new_check(number: int, *, state: str = "as-found", foot_id: str = "LC-1", calibration: str = "c") -> NewCheck:
    """Return a scored check with three loads and a session digest of its own."""
    loads = tuple(LoadCheck(k, "up", 100.0 * k, 100.0 * k, 0.0, 0.1, 0.1, 0.0, 0.0) for k in (1, 2, 3))
    score = CheckScore(foot_id, loads, 0.1, 0.05, 0.02, 0.01, 0.0, float("nan"), 0.02, 21.0)
    return NewCheck(
        score=score,
        limits=drift_limits("cell", 500.0),
        kind="cell",
        capacity_N=500.0,
        calibration_sha256=calibration * 64,
        session_sha256=f"{number:064x}",
        session_name=f"check {number}",
        state=state,
        t_utc=START + dt.timedelta(days=7 * number),
    )


def stored(
    week: float,
    *,
    zero_N: float = 0.0,
    span_pct: float = 0.0,
    loop_N: float = 0.1,
    noise_N: float = 0.05,
    state: str = "as-found",
    calibration: str = "c",
    foot_id: str = "LC-1",
    u: float = 0.02,
) -> StoredCheck:
    """Return a check of a 500 N cell as the history holds it: limits 1 % and 2.5 N."""
    return StoredCheck(
        id=int(week),
        foot_id=foot_id,
        kind="cell",
        capacity_N=500.0,
        calibration_sha256=calibration,
        session_name=f"week {week}",
        state=state,
        t_utc=START + dt.timedelta(days=7 * week),
        zero_N=zero_N,
        zero_u_N=u,
        span_pct=span_pct,
        span_u_pct=u,
        zero_span_cov_N_pct=0.0,
        loop_N=loop_N,
        noise_N=noise_N,
        temp_C=21.0,
        limit_span_pct=1.0,
        limit_zero_N=2.5,
    )
