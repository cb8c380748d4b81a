"""Legs: the robot's description, its geometry and rigid-body terms, and what motor current tells of joint torque."""

from __future__ import annotations

from importlib import import_module
from typing import Any

_WHERE = {
    "DriveFile": "drivefile",
    "DriveJoint": "drivefile",
    "LegSettings": "constants",
    "Robot": "description",
    "fill_leg_constants": "constants",
    "fresh_leg_state": "constants",
    "leg_constant_fields": "fields",
    "leg_dtypes": "fields",
    "leg_state_fields": "fields",
    "leg_step": "step",
    "load_drives": "drivefile",
}

__all__ = sorted(_WHERE)  # noqa: PLE0605  # one table, so that the description is read without waiting for the compiler


def __getattr__(name: str) -> Any:
    if name not in _WHERE:
        message = f"module {__name__!r} has no attribute {name!r}"
        raise AttributeError(message)
    return getattr(import_module(f"{__name__}.{_WHERE[name]}"), name)


def __dir__() -> list[str]:
    return __all__
