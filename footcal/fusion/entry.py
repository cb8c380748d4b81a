"""The two compiled entry points, `tick` and `batch`, over one and the same step; numba keeps them on disk.

Their cache is stamped with this file only, so both close over a number that changes with any source of the three parts.
"""

from __future__ import annotations

from typing import Any

from numba import njit

from footcal.fusion.step import step
from footcal.sensor.cachekey import source_key


def _make(key: int) -> tuple[Any, Any]:
    @njit(cache=True, error_model="numpy")
    def tick(inp: Any, gravity: Any, S: Any, C: Any, out: Any) -> None:
        if key == 0:
            return
        step(inp[0], gravity, S[0], C[0], out[0])

    @njit(cache=True, error_model="numpy")
    def batch(rows: Any, gravity: Any, S: Any, C: Any, out_rows: Any) -> None:
        if key == 0:
            return
        s = S[0]
        c = C[0]
        for i in range(rows.shape[0]):
            step(rows[i], gravity, s, c, out_rows[i])

    return tick, batch


tick, batch = _make(source_key("footcal.sensor", "footcal.leg", "footcal.fusion"))
