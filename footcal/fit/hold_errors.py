"""How far each hold lies from the fit: the mean of its residuals as a fit sees it that was made without that hold."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from scipy.optimize import minimize

from footcal.fit.channel import Channel
from footcal.fit.features import mean_features
from footcal.fit.passes import Fitted, Reading
from footcal.fit.priors import prior_rows
from footcal.fit.robust import robust_sd
from footcal.fit.rows import Rows
from footcal.records import BoolArray, FloatArray, IntArray

FREEDOM: Final = 4.0  # of Student's t, whose tails let a few bad holds be
FEWEST: Final = 8  # holds of a kind that get a scatter of their own


@dataclass(frozen=True, slots=True)
class HoldErrors:
    """Errors of the holds, measured load less what the model reads, shares of full scale."""

    index: IntArray  # (h,) hold indices
    mean: FloatArray  # (h,) left out
    load: FloatArray  # (h,)
    quick: BoolArray  # (h,)


def hold_errors(fitted: Fitted, fitted_rows: Rows, channel: Channel, reading: Reading, rows_all: Rows) -> HoldErrors:
    """Return the error of every hold of `rows_all` against a fit that did not see it.

    Holds that were fitted are taken out again in closed form: with A the weighted rows and H = A (A^T A + L)^-1 A^T,
    the residuals of a block left out are (I - H_ii)^-1 r_i (R. D. Cook, S. Weisberg, Residuals and Influence in
    Regression, 1982). Holds that were not fitted are predicted.

    Args:
        fitted: the fit.
        fitted_rows: rows it was made of.
        channel: joined samples.
        reading: ratio and temperature of every sample.
        rows_all: all hold rows, those set aside as well.
    """
    features = mean_features(
        channel.t_ns, fitted.apparent, reading.theta, fitted.creep_undone, rows_all.start, rows_all.stop
    )
    residual = rows_all.target - features @ fitted.coefficients
    weight = dict(zip(fitted_rows.start.tolist(), (fitted_rows.weight * fitted.row_weight).tolist(), strict=True))
    root = np.sqrt([weight.get(start, 0.0) for start in rows_all.start.tolist()])
    columns = features[:, fitted.terms.active()]
    factor = _inverse_factor(fitted, fitted_rows)
    index = np.unique(rows_all.hold)
    mean, load, quick = np.empty(len(index)), np.empty(len(index)), np.zeros(len(index), dtype=bool)
    for k, hold in enumerate(index):
        mine = rows_all.hold == hold
        weighted = (columns[mine] * root[mine, None]) @ factor
        left_out = residual[mine]
        if root[mine].all():
            kept = np.eye(len(left_out)) - weighted @ weighted.T
            left_out = np.linalg.solve(kept, left_out * root[mine]) / root[mine]
        mean[k], load[k] = left_out.mean(), rows_all.target[mine][0]
        quick[k] = bool(rows_all.quick[mine][0])
    return HoldErrors(index, mean, load, quick)


def _inverse_factor(fitted: Fitted, rows: Rows) -> FloatArray:
    """Return S with S S^T = (A^T A + L)^-1, shape (k, k)."""
    active = fitted.terms.active()
    weighted = fitted.features[:, active] * np.sqrt(rows.weight * fitted.row_weight)[:, None]
    upper = np.linalg.qr(np.vstack([weighted, prior_rows(active, fitted.creep_rms)]), mode="r")
    return np.asarray(np.linalg.inv(upper))


def usual_scatter(errors: HoldErrors, floor: float) -> FloatArray:
    """Return the standard deviation of good holds, shape (h,): one part is fixed, one grows with the load.

    Whisked loads still swing and have a scatter of their own. Each is the likeliest under Student's t with 4 degrees of
    freedom, which a few bad holds hardly move.
    """
    sd = np.empty(len(errors.mean))
    for group in (errors.quick, ~errors.quick):
        if not group.any():
            continue
        source = group if group.sum() >= FEWEST else np.ones(len(group), dtype=bool)
        fixed, relative = _two_parts(errors.mean[source], np.abs(errors.load[source]), floor)
        sd[group] = np.hypot(fixed, relative * errors.load[group])
    return np.maximum(sd, floor)


def _two_parts(mean: FloatArray, load: FloatArray, floor: float) -> tuple[float, float]:
    start = max(robust_sd(mean), floor)

    def unlikely(logs: FloatArray) -> float:
        scale = np.sqrt(np.exp(2.0 * logs[0]) + (np.exp(logs[1]) * load) ** 2 + floor**2)
        return float(np.sum(np.log(scale) + 0.5 * (FREEDOM + 1.0) * np.log1p((mean / scale) ** 2 / FREEDOM)))

    found = minimize(unlikely, np.log([start, start]), method="Nelder-Mead", options={"xatol": 0.02, "fatol": 0.02}).x
    to_sd = 1.2  # scale of the t that fits normal values best, against their standard deviation (from memory)
    return to_sd * float(np.exp(found[0])), to_sd * float(np.exp(found[1]))
