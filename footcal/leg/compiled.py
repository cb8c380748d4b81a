"""The decorator of all that runs inside the step: no Python entry of its own, so that less is compiled."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

from numba import njit

Function = TypeVar("Function", bound=Callable[..., Any])
_OPTIONS: dict[str, Any] = {"error_model": "numpy", "no_cpython_wrapper": True, "no_cfunc_wrapper": True}


def inner(function: Function) -> Function:
    """Compile a function that only other compiled functions call.

    Args:
        function: plain Python over records and scalars.

    Returns:
        The compiled function; callable from Python only with the compiler switched off (NUMBA_DISABLE_JIT=1).
    """
    compiled: Function = njit(**_OPTIONS)(function)
    return compiled
