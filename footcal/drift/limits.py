"""How far a foot may drift, and how much a check of it scatters from day to day anyway."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray

# Common practice, no source: the shifts that matter to a walking robot.
_SPAN_pct: Final = {"cell": 1.0, "resistive": 2.0, "magnetic": 2.0, "capacitive": 2.0}
_ZERO_share: Final = {"cell": 0.005, "resistive": 0.01, "magnetic": 0.01, "capacitive": 0.01}
# Placement, cables and weather between two days, standard deviations; common practice, no source.
_DAY_SPAN_pct: Final = {"cell": 0.03, "resistive": 0.2, "magnetic": 0.15, "capacitive": 0.15}
_DAY_ZERO_share: Final = {"cell": 0.0008, "resistive": 0.003, "magnetic": 0.002, "capacitive": 0.002}
# Between two placements of one load on one day, standard deviations; common practice, no source.
_PLACE_pct: Final = {"cell": 0.02, "resistive": 0.4, "magnetic": 0.25, "capacitive": 0.2}
_PLACE_share: Final = {"cell": 0.0001, "resistive": 0.002, "magnetic": 0.001, "capacitive": 0.001}


@dataclass(frozen=True, slots=True)
class DriftLimits:
    """Tolerance of one foot, and the scatter of a check that is no drift."""

    span_pct: float  # largest change of span, either way
    zero_N: float  # largest shift of zero, either way
    day_span_pct: float  # standard deviation from day to day
    day_zero_N: float


def drift_limits(
    kind: str, capacity_N: float, *, span_pct: float | None = None, zero_pct_FS: float | None = None
) -> DriftLimits:
    """Return the limits of a foot: cells 1 % span and 0.5 % FS zero, pads 2 % and 1 %, or what is asked for.

    Args:
        kind: cell, resistive, magnetic or capacitive.
        capacity_N: full scale, newtons.
        span_pct: instead of the default, per cent.
        zero_pct_FS: instead of the default, per cent of full scale.

    Raises:
        SettingError: a limit is not above 0, or the kind is not known.
    """
    if kind not in _SPAN_pct:
        raise SettingError(
            where="sensor kind", what=f"{kind!r} is not known", mend=f"Choose from {', '.join(_SPAN_pct)}."
        )
    for name, limit in (("--limit-span-pct", span_pct), ("--limit-zero-pct", zero_pct_FS)):
        if limit is not None and not 0.0 < limit < 100.0:
            raise SettingError(
                where=name, what=f"{limit:g} % is not between 0 and 100 %", mend="Give a limit in per cent."
            )
    return DriftLimits(
        span_pct=_SPAN_pct[kind] if span_pct is None else span_pct,
        zero_N=capacity_N * (_ZERO_share[kind] if zero_pct_FS is None else zero_pct_FS / 100.0),
        day_span_pct=_DAY_SPAN_pct[kind],
        day_zero_N=capacity_N * _DAY_ZERO_share[kind],
    )


def placement_sd_N(kind: str, capacity_N: float, load_N: FloatArray) -> FloatArray:
    """Return how much a hold scatters from placement to placement: a share of full scale and a share of the load.

    Args:
        kind: cell, resistive, magnetic or capacitive.
        capacity_N: full scale, newtons.
        load_N: loads, shape (n,).
    """
    return np.hypot(_PLACE_share[kind] * capacity_N, _PLACE_pct[kind] / 100.0 * load_N)
