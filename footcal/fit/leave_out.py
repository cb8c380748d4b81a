"""Errors on data left out of the fit: by cycles, by load levels, by pump blocks, from merged triangular factors."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.fit.least_squares import solve_without_each, triangle
from footcal.fit.passes import Fitted
from footcal.fit.priors import prior_rows
from footcal.fit.rows import Rows
from footcal.records import FloatArray, IntArray

TRIM: Final = 0.02  # this share of the largest residuals does not count; fixed, so that candidates compare


@dataclass(frozen=True, slots=True)
class LeftOut:
    """Residuals of each row predicted by a fit that did not see its group; NaN where it belongs to none."""

    cycles: FloatArray  # (rows,) settled holds, their cycle left out
    quick: FloatArray  # whisked loads, all of them left out together with their cycle
    loads: FloatArray  # settled holds, their load level left out
    pump: FloatArray

    def rms_percent(self) -> tuple[float | None, float | None, float | None]:
        """Trimmed RMS in per cent of full scale: cycles, loads, pump; None where nothing was left out."""
        return trimmed_rms(self.cycles), trimmed_rms(self.loads), trimmed_rms(self.pump)

    def all_percent(self) -> tuple[float | None, ...]:
        """Trimmed RMS as above, whisked loads apart: a weight still swinging must not drown what settled holds say."""
        return (*self.rms_percent(), trimmed_rms(self.quick))


def trimmed_rms(residual: FloatArray) -> float | None:
    """Return the RMS in per cent of the values that are not NaN, less the largest 2 %; None without values."""
    known = np.sort(np.abs(residual[np.isfinite(residual)]))
    if len(known) == 0:
        return None
    kept = known[: max(1, round(len(known) * (1.0 - TRIM)))]
    return float(100.0 * np.sqrt(np.mean(kept**2)))


def leave_out(fitted: Fitted, rows: Rows) -> LeftOut:
    """Return the left-out residuals of a fit; curve, creep undone and row weights stay as fitted on all data."""
    active = fitted.terms.active()
    columns = fitted.features[:, active]
    root = np.sqrt(rows.weight * fitted.row_weight)
    prior = prior_rows(active, fitted.creep_rms)
    prior_triangle = triangle(prior, np.zeros(len(prior)))
    cycles, loads, pump = (
        _predict_left_out(columns, rows.target, root, groups, prior_triangle)
        for groups in (rows.cycle, rows.level, rows.block)
    )
    settled = rows.quick == 0
    return LeftOut(
        cycles=np.where(settled, cycles, np.nan),
        quick=np.where(settled, np.nan, cycles),
        loads=np.where(settled, loads, np.nan),
        pump=pump,
    )


def _predict_left_out(
    columns: FloatArray, target: FloatArray, root: FloatArray, groups: IntArray, prior_triangle: FloatArray
) -> FloatArray:
    """Refit without each group in turn and predict it; rows of group -1 stay in every fit."""
    residual = np.full(len(target), np.nan)
    names = np.unique(groups[groups >= 0])
    if len(names) < 2:
        return residual
    weighted, weighted_target = columns * root[:, None], target * root
    members = [np.flatnonzero(groups == name) for name in names]
    factors = [triangle(weighted[mine], weighted_target[mine]) for mine in members]
    rest = groups < 0
    always = triangle(
        np.vstack([prior_triangle[:, :-1], weighted[rest]]),
        np.concatenate([prior_triangle[:, -1], weighted_target[rest]]),
    )
    for mine, coefficients in zip(members, solve_without_each(factors, always), strict=True):
        residual[mine] = target[mine] - columns[mine] @ coefficients
    return residual
