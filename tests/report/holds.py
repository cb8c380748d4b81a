"""A few holds with known errors, made by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from footcal.report.points import HoldPoints

UP_DOWN = HoldPoints(
    load_N=np.array([0.0, 10.0, 20.0, 10.0, 0.0]),
    raw=np.array([100.0, 200.0, 300.0, 210.0, 102.0]),
    temp_C=np.full(5, 22.0),
    t_s=np.array([0.0, 10.0, 20.0, 30.0, 40.0]),
    before_N=np.array([0.0, -1.0, 0.0, 2.0, 0.3]),
    after_N=np.array([0.0, -0.1, 0.0, 0.1, 0.0]),
    cycle_out_N=np.array([0.0, -0.2, 0.1, 0.2, 0.0]),
    level_out_N=np.array([np.nan, -0.3, np.nan, 0.3, np.nan]),
    cycle=np.ones(5),
    session=np.zeros(5),
    direction=("zero", "up", "up", "down", "zero"),
    kind=("hold",) * 5,
)
UNKNOWN = replace(
    UP_DOWN,
    temp_C=np.full(5, np.nan),
    cycle_out_N=np.full(5, np.nan),
    level_out_N=np.full(5, np.nan),
    kind=("press",) * 5,
)
