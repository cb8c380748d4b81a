"""The two record layouts that all parts of the step share: state and constants of sensor, leg and filter in one."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from footcal.fusion.fields import Field, filter_constant_fields, filter_state_fields, shared_state_fields
from footcal.leg import leg_constant_fields, leg_state_fields
from footcal.sensor import sensor_constant_fields, sensor_state_fields


def joined(*parts: list[Field]) -> np.dtype[np.void]:
    """Return one dtype of all fields; a field that two parts declare alike stands once.

    Raises:
        TypeError: two parts declare one name with different type or shape (numpy refuses the double name).
    """
    fields = dict.fromkeys((name, np.dtype(kind).str, shape) for part in parts for name, kind, shape in part)
    return np.dtype(list(fields))


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
    return joined(
        sensor_constant_fields(legs), leg_constant_fields(legs, joints), filter_constant_fields(legs, joints)
    )
