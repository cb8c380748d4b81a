"""Fusion of foot sensor and motor currents: contact and ground reaction force of every leg, and their trust."""

from __future__ import annotations

from importlib import import_module
from typing import Any

_WHERE = {
    "EstimateColumns": "estimate",
    "FuseSummary": "runs",
    "Fusion": "engine",
    "FusionSettings": "model",
    "Score": "score",
    "estimate_writer": "estimate_files",
    "fuse_to_file": "runs",
    "fuse_to_lines": "runs",
    "load_calibrations": "engine",
    "read_estimate": "estimate_files",
    "write_estimate": "estimate_files",
    "write_json_lines": "estimate_files",
}

__all__ = sorted(_WHERE)  # noqa: PLE0605  # one table, so that nothing waits for the compiler before it is used


def __getattr__(name: str) -> Any:
    if name not in _WHERE:
        message = f"module {__name__!r} has no attribute {name!r}"
        raise AttributeError(message)
    return getattr(import_module(f"{__name__}.{_WHERE[name]}"), name)


def __dir__() -> list[str]:
    return __all__
