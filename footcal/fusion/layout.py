"""The two record layouts that all parts of the step share: state and constants of sensor, leg and filter in one."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from footcal.fusion.fields import filter_constant_fields, filter_state_fields, joined, shared_state_fields
from footcal.leg.fields import leg_constant_fields, leg_state_fields
from footcal.sensor.fields import sensor_constant_fields, sensor_state_fields


@lru_cache(maxsize=32)
def state_dtype(legs: int, joints: int) -> np.dtype[np.void]:
    """Return the layout of everything that the step remembers, of all parts."""
    return joined(
        shared_state_fields(legs, joints),
        sensor_state_fields(legs),
        leg_state_fields(legs, joints),
        filter_state_fields(legs, joints),
    )


@lru_cache(maxsize=32)
def constant_dtype(legs: int, joints: int) -> np.dtype[np.void]:
    """Return the layout of all constants, of all parts."""
    return joined(sensor_constant_fields(legs), leg_constant_fields(legs, joints), filter_constant_fields(legs, joints))
