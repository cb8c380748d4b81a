"""footcal: foot force sensors of legged robots, from bench weights to contact and ground reaction force."""

from __future__ import annotations

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

_PUBLIC = {  # public name -> module it lives in; imported when first used, so that the command line starts quickly
    "Calibration": "footcal.calfile",
    "CalibrationFile": "footcal.calfile",
    "Compensator": "footcal.sensor.compensator",
    "FitResult": "footcal.fit.engine",
    "FootcalError": "footcal.errors",
    "ForceModel": "footcal.fit.estimator",
    "ForceColumns": "footcal.sensor.compensator",
    "Health": "footcal.records",
    "LegEstimate": "footcal.records",
    "Session": "footcal.files.session",
    "Tick": "footcal.records",
    "convert_log": "footcal.calfile.convert",
    "curve": "footcal.fit.curve",
    "fit_sessions": "footcal.fit.engine",
    "fleet_verdicts": "footcal.drift.verdict",
    "Fusion": "footcal.fusion.engine",
    "History": "footcal.drift.history",
    "Robot": "footcal.leg.description",
    "mass_force": "footcal.physics.force",
    "read_robot_log": "footcal.files.robot_log",
    "read_session": "footcal.files.session",
}

__all__ = sorted(_PUBLIC)  # noqa: PLE0605


def __getattr__(name: str) -> Any:
    """Import a public name when it is first used (PEP 562)."""
    if name not in _PUBLIC:
        msg = f"module {__name__!r} has no attribute {name!r}"
        raise AttributeError(msg)
    value = getattr(import_module(_PUBLIC[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return list(__all__)
