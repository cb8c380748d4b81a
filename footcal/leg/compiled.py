"""The decorator of everything that runs inside the step: no Python entry of its own, which halves what is compiled."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

from numba import njit

Function = TypeVar("Function", bound=Callable[..., Any])


def inner(function: Function) -> Function:
    """Compile a function that only other compiled functions call.

    Args:
        function: plain Python over records and scalars.

    Returns:
        The compiled function; callable from Python only with the compiler switched off (NUMBA_DISABLE_JIT=1).
    """
    compiled: Function = njit(error_model="numpy", no_cpython_wrapper=True, no_cfunc_wrapper=True)(function)
    return compiled
