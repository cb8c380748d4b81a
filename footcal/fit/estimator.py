"""The sensor model as a scikit-learn regressor: the same features, passes and solver, for pipelines and searches.

A sensor with hysteresis and creep has a memory: the same reading means another force after another past. So rows are
samples in order of time, and every call of `predict` starts at rest, as at power-up.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final, Self

import numpy as np
from sklearn.base import BaseEstimator, RegressorMixin
from sklearn.utils.validation import check_is_fitted, validate_data
from threadpoolctl import threadpool_limits

from footcal.errors import SettingError
from footcal.fit.channel import Channel
from footcal.fit.features import mean_features
from footcal.fit.least_squares import solve
from footcal.fit.passes import Reading, fit_terms
from footcal.fit.reading import raw_form
from footcal.fit.rows import PUMP_WEIGHT_PER_S, Rows
from footcal.fit.terms import Terms
from footcal.records import NS_PER_S, FloatArray, IntArray
from footcal.sensor.curve import N_POWERS, power_columns
from footcal.sensor.model import CREEPS, N_FEATURES
from footcal.sensor.temperature import N_TEMPERATURE, THETA_SCALE_K, temperature_columns
from footcal.sensor.transform import arm_ratios, normalised

COLUMNS: Final = ("raw", "t_s", "temp_C")
KINDS: Final = ("cell", "resistive", "magnetic", "capacitive")


class ForceModel(RegressorMixin, BaseEstimator):  # type: ignore[misc]  # scikit-learn has no types
    """Force from raw readings: curve, temperature, hysteresis and creep, fitted robustly.

    Without temperature, hysteresis and creep it is the plain least-squares polynomial.

    Args:
        kind: cell, resistive (a divider), magnetic, capacitive.
        capacity_N: full scale; None takes the largest size of y.
        degree: of the curve, 1 to 5; lower where there are not more different readings than that (`degree_`).
        power: bend of a divider's conductance; 1 leaves it straight.
        hysteresis: fit plays.
        hysteresis_by_load: let them grow with load.
        creep: fit creep.
        temperature: zero and span straight in temperature; needs the column temp_C.
        columns: what the first columns of X are, of raw, t_s (seconds) and temp_C. Columns beyond those named are other
            quantities that act in proportion (a supply voltage, another axis): each gets a straight line.
        interval_s: time from row to row where there is no column t_s.
        raw_max: top of the converter, needed for dividers only; None takes that of a usual converter.

    Attributes (after `fit`):
        capacity_N_, degree_, reading range u_zero_ and u_span_, curve_ (6,), curve_temperature_ (5,),
        creep_undone_ (8,), coefficients_ (32,), coef_other_ (columns beyond those named,), temp_ref_C_, n_features_in_.
    """

    def __init__(
        self,
        kind: str = "cell",
        *,
        capacity_N: float | None = None,
        degree: int = 3,
        power: float = 1.0,
        hysteresis: bool = True,
        hysteresis_by_load: bool = False,
        creep: bool = True,
        temperature: bool = False,
        columns: Sequence[str] = ("raw",),
        interval_s: float = 0.0125,
        raw_max: float | None = None,
    ) -> None:
        """Keep the settings; they are checked by `fit`."""
        self.kind = kind
        self.capacity_N = capacity_N
        self.degree = degree
        self.power = power
        self.hysteresis = hysteresis
        self.hysteresis_by_load = hysteresis_by_load
        self.creep = creep
        self.temperature = temperature
        self.columns = columns
        self.interval_s = interval_s
        self.raw_max = raw_max

    def fit(self, X: Any, y: Any) -> Self:  # scikit-learn's own name
        """Fit to samples in order of time.

        Args:
            X: shape (n, m), the named columns first.
            y: force, newtons, shape (n,).

        Raises:
            SettingError: a setting is out of range.
            FitRefusedError: the samples can't tell the coefficients apart.
            ValueError: what scikit-learn's own checks find wrong with X or y, or times that run backwards.
        """
        self._check_settings()
        X, y = validate_data(self, X, y, dtype=np.float64, y_numeric=True, ensure_min_samples=self.degree + 2)
        self.capacity_N_ = float(self.capacity_N or np.max(np.abs(y)) or 1.0)
        target = np.asarray(y, dtype=np.float64) / self.capacity_N_
        raw = self._column(X, "raw")
        self._fit_reading(raw, target)
        self.degree_ = max(1, min(self.degree, len(np.unique(raw)) - 1))
        temp_C = self._column(X, "temp_C")
        self.temp_ref_C_ = float(np.median(temp_C))
        x, theta, other = self._inputs(X)
        terms = self._terms()
        plain = solve(np.column_stack([power_columns(x)[:, : self.degree_ + 1], other - other.mean(axis=0)]), target)
        self.coef_other_ = plain.coefficients[self.degree_ + 1 :]
        self.other_mean_ = other.mean(axis=0)
        self.coefficients_ = np.eye(1, N_FEATURES, 1)[0]  # the curve as it is
        self.curve_, self.curve_temperature_ = np.zeros(N_POWERS), np.zeros(N_TEMPERATURE)
        self.curve_[: self.degree_ + 1] = plain.coefficients[: self.degree_ + 1]
        self.creep_undone_ = np.zeros(CREEPS.stop - CREEPS.start)
        if terms.plays or terms.creep or terms.temperature:
            with threadpool_limits(limits=1):  # the factors are small: more threads only wait for each other
                self._fit_terms(X, theta, target - (other - self.other_mean_) @ self.coef_other_, terms)
        return self

    def predict(self, X: Any) -> FloatArray:
        """Return the force, newtons, shape (n,), of samples in order of time, started at rest.

        Args:
            X: shape (n, m), columns as for `fit`.

        Raises:
            ValueError: X has another form than that of `fit`, or times run backwards.
        """
        check_is_fitted(self)
        X = validate_data(self, X, dtype=np.float64, reset=False)
        x, theta, other = self._inputs(X)
        apparent = power_columns(x) @ self.curve_ + temperature_columns(theta, x) @ self.curve_temperature_
        rows = np.arange(len(x))
        features = mean_features(self._t_ns(X), apparent, theta, self.creep_undone_, rows, rows + 1)
        share = features @ self.coefficients_ + (other - self.other_mean_) @ self.coef_other_
        return np.asarray(share * self.capacity_N_)

    def _check_settings(self) -> None:
        names = tuple(self.columns)
        clear = "raw" in names and set(names) <= set(COLUMNS) and len(set(names)) == len(names)
        rules = (
            (self.kind in KINDS, f"kind {self.kind!r} is not known", f"Choose from {', '.join(KINDS)}."),
            (1 <= self.degree < N_POWERS, f"degree {self.degree} is out of range", "Choose 1 to 5."),
            (self.power > 0.0, f"power {self.power:g} is not positive", "Choose 0.35 to 1."),
            (self.capacity_N is None or self.capacity_N > 0.0, "capacity_N is not positive", "Give newtons, or None."),
            (self.interval_s > 0.0, f"interval_s {self.interval_s:g} is not positive", "Give seconds."),
            (clear, f"columns {names} are not clear", "Name raw, and t_s and temp_C where X has them, once each."),
            (
                "temp_C" in names or not self.temperature,
                "no column temp_C is named",
                "Name it, or set temperature off.",
            ),
        )
        for good, what, mend in rules:
            if not good:
                raise SettingError("ForceModel", what, mend)

    def _terms(self) -> Terms:
        return Terms(
            self.degree_,
            self.power,
            temperature=self.temperature,
            plays=self.hysteresis,
            plays_by_load=self.hysteresis_by_load,
            creep=self.creep,
        )

    def _column(self, X: FloatArray, name: str) -> FloatArray:
        """Return a named column, shape (n,); zeros where it is not among them."""
        names = tuple(self.columns)
        if X.shape[1] < len(names):
            msg = f"X has n_features = {X.shape[1]}, fewer than the {len(names)} named: {', '.join(names)}"
            raise ValueError(msg)
        return np.ascontiguousarray(X[:, names.index(name)]) if name in names else np.zeros(len(X))

    def _t_ns(self, X: FloatArray) -> IntArray:
        """Return the time of each row, shape (n,), nanoseconds from the first, which is 1."""
        t_s = self._column(X, "t_s") if "t_s" in tuple(self.columns) else np.arange(len(X)) * float(self.interval_s)
        t_ns: IntArray = np.rint((t_s - t_s[0]) * NS_PER_S).astype(np.int64) + 1
        if np.any(np.diff(t_ns) <= 0):
            msg = f"time does not rise from row {int(np.argmin(np.diff(t_ns) > 0))} on: sort the rows by t_s"
            raise ValueError(msg)
        return t_ns

    def _fit_reading(self, raw: FloatArray, target: FloatArray) -> None:
        """Learn wiring, zero and span: from the reading at the smallest force to the furthest on the loaded side."""
        loaded = float(np.dot(raw - raw.mean(), target - target.mean()))
        form = raw_form(self.kind, raw, loaded, self.raw_max)
        self.wiring_, self.raw_max_ = form.wiring, form.raw_max
        ratio = arm_ratios(raw, self.raw_max_, self.wiring_)
        low, high = float(ratio.min()), float(ratio.max())
        falls = loaded < 0.0 and self.wiring_ == "counts"
        self.u_zero_, self.u_span_ = (high, low) if falls else (low, high)
        if low == high:
            self.u_span_ = self.u_zero_ + 1.0

    def _inputs(self, X: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return normalised reading (n,), scaled temperature (n,) and the columns beyond those named (n, k)."""
        ratio = arm_ratios(self._column(X, "raw"), self.raw_max_, self.wiring_)
        x = normalised(ratio, u_zero=self.u_zero_, u_span=self.u_span_, gamma=self.power)
        theta = (self._column(X, "temp_C") - self.temp_ref_C_) / THETA_SCALE_K
        return x, np.asarray(theta), X[:, len(tuple(self.columns)) :]

    def _fit_terms(self, X: FloatArray, theta: FloatArray, target: FloatArray, terms: Terms) -> None:
        """Fit curve and memory by the passes that calibration sessions go through, each sample a row."""
        raw, count = self._column(X, "raw"), len(X)
        t_ns = self._t_ns(X)
        channel = Channel(
            t_ns, raw, self._column(X, "temp_C"), np.full(count, np.nan), np.zeros(count, np.int64), np.zeros(1), ()
        )
        ratio = arm_ratios(raw, self.raw_max_, self.wiring_)
        interval_s = float(np.median(np.diff(t_ns))) / NS_PER_S
        reading = Reading(ratio, theta, self.u_zero_, self.u_span_, noise=0.0, sample_noise=0.0, interval_s=interval_s)
        each, none = np.arange(count), np.full(count, -1)
        weight = np.full(count, min(1.0, PUMP_WEIGHT_PER_S * interval_s))  # what follows closely is no news
        rows = Rows(each, each + 1, target, weight, each, none, none, none, np.zeros(count, np.int64))
        fitted = fit_terms(channel, reading, rows, terms)
        self.curve_, self.curve_temperature_ = fitted.curve, fitted.curve_temperature
        self.creep_undone_, self.coefficients_ = fitted.creep_undone, fitted.coefficients
