"""A finished fit as the content of a calibration file."""

from __future__ import annotations

import datetime as dt
from typing import Any, Final

import numpy as np

from footcal import __version__
from footcal.fit.channel import THERMOMETER_LAG_S
from footcal.fit.choose import Candidate
from footcal.fit.inputs import FitInput
from footcal.fit.outcome import FitOutcome
from footcal.fit.rows import LEVEL_SHARE, Rows
from footcal.fit.side_load import UNTESTED, SideLoad
from footcal.fit.trust import DAY_SPAN, DAY_ZERO
from footcal.records import FloatArray
from footcal.sensor.creep import CREEP_TAU_S
from footcal.sensor.hysteresis import PLAY_HALF_WIDTH
from footcal.sensor.model import CREEPS, FEATURES, PLAYS, PLAYS_BY_LOAD, RuntimeUncertainty
from footcal.sensor.transform import POWER_OFFSET

UNLOAD_DECAY_S: Final = 6.0
FORGOTTEN: Final = 0.01  # of full scale: below this the state at power-up no longer matters


def calibration_content(outcome: FitOutcome) -> dict[str, Any]:
    """Return everything the calibration file holds but its digest, as plain JSON values."""
    data, best, rows = outcome.data, outcome.best, outcome.rows
    uncertainty, covariance = outcome.uncertainty, outcome.covariance
    low_N, high_N = float(rows.target.min()) * data.capacity_N, _highest_N(data, rows)
    cycles, loads, pump = best.left_out.rms_percent()
    now = dt.datetime.now(dt.UTC).isoformat(timespec="seconds")
    return {
        "foot_id": data.foot_id,
        "sensor": {
            "kind": data.kind,
            "capacity_N": data.capacity_N,
            "safe_limit_N": data.sessions[0].meta.safe_limit_N,
        },
        "provenance": {"made_utc": now, "tool_version": __version__, "sessions": _sessions(data)},
        "input": _input(data, best, outcome.lag_s),
        "model": {**_model(best, covariance), "cross_axis": _cross_axis(data, outcome.side)},
        "unload": {"share_of_peak": unload_share(best, rows, data), "decay_s": UNLOAD_DECAY_S},
        "zero": _zero(data),
        "validity": {
            "force_min_N": min(low_N, 0.0),
            "force_max_N": high_N,
            **_temperature_range(data),
            "dynamic": outcome.dynamic,
        },
        "figures": {"cycles": cycles, "loads": loads, "pump": pump},
        "set_aside": [
            {
                "session": data.sessions[data.session_of[aside.hold]].name,
                "step": data.holds[aside.hold].step,
                "reason": aside.reason,
                "entered_kg": _finite(data.holds[aside.hold].mass_kg),
                "fits_kg": aside.fits_kg,
            }
            for aside in outcome.asides
        ],
        "clock_offset_s": outcome.aligned.offset_s if outcome.aligned else None,
        "uncertainty": {
            "runtime": {**{name: getattr(uncertainty, name) for name in _RUNTIME}, "rows": uncertainty.rows.tolist()},
            "budget": _budget(data, best, rows, uncertainty, covariance),
            "curve": uncertainty_curve(data, best, rows, uncertainty),
        },
        "history": [{"date_utc": _start(data) or now, "zero_N": 0.0, "span_pct": 0.0, "note": "as calibrated"}],
        "notes": list(outcome.notes),
    }


_RUNTIME: Final = (
    "fixed",
    "relative",
    "moving",
    "noise",
    "noise_interval_s",
    "temp_C",
    "temp_absent_C",
    "beyond",
)


def _highest_N(data: FitInput, rows: Rows) -> float:
    """Return the highest load fitted, below any at which the reading stuck at its end, newtons."""
    loads_N = rows.target * data.capacity_N
    if data.saturated_from_N is not None:
        below_N = loads_N[loads_N < data.saturated_from_N - LEVEL_SHARE * data.capacity_N]
        if below_N.size and below_N.max() > 0.0:
            return float(below_N.max())
    return float(loads_N.max())


def unload_share(best: Candidate, rows: Rows, data: FitInput) -> float:
    """Return what the unloaded foot still reads after the model, as a share of the highest load of the cycle before.

    From the zero rows that follow a load: root mean square of the residual over the load just taken off.
    """
    shares, last = [], 0.0
    for row in np.flatnonzero(~rows.pump):
        if data.holds[rows.hold[row]].direction == "zero":
            if last > 0.05:
                shares.append(best.fitted.residual[row] / last)
        else:
            last = max(float(rows.target[row]), 0.7 * last)
    return float(min(np.sqrt(np.mean(np.square(shares))), 1.0)) if shares else 0.02


def uncertainty_curve(
    data: FitInput, best: Candidate, rows: Rows, uncertainty: RuntimeUncertainty
) -> list[dict[str, float]]:
    """Return U (k = 2) of a settled reading at eleven forces over the range."""
    top = float(rows.target.max())
    holds = ~rows.pump
    fit_part = np.sum((best.fitted.features[holds] @ uncertainty.rows.T) ** 2, axis=1)
    load = rows.target[holds]
    points = []
    for share in np.linspace(0.0, top, 11):
        near = np.argsort(np.abs(load - share))[: max(6, len(load) // 12)]
        u2 = float(np.mean(fit_part[near])) + uncertainty.fixed**2 + (uncertainty.relative * share) ** 2
        points.append({"force_N": float(share) * data.capacity_N, "U_N": 2.0 * float(np.sqrt(u2)) * data.capacity_N})
    return points


def _input(data: FitInput, best: Candidate, lag_s: float) -> dict[str, Any]:
    return {
        "wiring": data.form.wiring,
        "raw_min": data.form.raw_min,
        "raw_max": data.form.raw_max,
        "u_zero": data.reading.u_zero,
        "u_span": data.reading.u_span,
        "power": best.fitted.terms.gamma,
        "power_offset": POWER_OFFSET,
        "temp_ref_C": data.temp_ref_C,
        "thermometer_lag_s": THERMOMETER_LAG_S,
        "lag_s": lag_s,
    }


def _model(best: Candidate, covariance: FloatArray) -> dict[str, Any]:
    fitted = best.fitted
    time_s, swing = settle_rule(fitted.coefficients)
    return {
        "curve": fitted.curve.tolist(),
        "curve_temperature": fitted.curve_temperature.tolist(),
        "creep_tau_s": list(CREEP_TAU_S),
        "creep_undone": fitted.creep_undone.tolist(),
        "play_half_width": list(PLAY_HALF_WIDTH),
        "features": list(FEATURES),
        "coefficients": fitted.coefficients.tolist(),
        "covariance": [covariance[i, : i + 1].tolist() for i in range(len(covariance))],
        "settle": {"time_s": time_s, "swing_share": swing},
    }


def _cross_axis(data: FitInput, side: SideLoad | None) -> dict[str, Any]:
    """Return the cross-sensitivity found, or the stated default of a foot that was never tilted."""
    if side is None:
        return {"x": 0.0, "y": 0.0, "u_x": UNTESTED[data.kind], "u_y": UNTESTED[data.kind], "tested": False}
    return {"x": side.cross[0], "y": side.cross[1], "u_x": side.u[0], "u_y": side.u[1], "tested": side.tested}


def settle_rule(coefficients: FloatArray) -> tuple[float, float]:
    """Return after what time and what swing (share of full scale) the state at power-up matters less than 1 % FS.

    A creep state that starts half a full scale wrong decays with its own time constant; a play is forgotten once its
    input has swung over twice its half width, and until then may hang anywhere in its backlash.
    """
    gains, taus = np.abs(coefficients[CREEPS]), np.array(CREEP_TAU_S)
    times = np.geomspace(0.01, 1000.0, 200)
    crept = 0.5 * np.exp(-times[:, None] / taus) @ gains
    soon = np.flatnonzero(crept < FORGOTTEN)
    widths = np.array(PLAY_HALF_WIDTH)
    loops = (np.abs(coefficients[PLAYS]) + 0.5 * np.abs(coefficients[PLAYS_BY_LOAD])) * widths
    swings = np.concatenate([[0.0], 2.0 * widths])
    left = np.array([np.sqrt(np.sum(loops[2.0 * widths > swing] ** 2) / 3.0) for swing in swings])
    return float(times[soon[0]] if len(soon) else times[-1]), float(swings[int(np.argmax(left < FORGOTTEN))])


def _zero(data: FitInput) -> dict[str, Any]:
    meta = data.sessions[0].meta
    return {
        "stated_for": "hanging foot" if meta.mount is None else "massless foot",
        "mount": meta.mount,
        "mount_angle_rad": meta.mount_angle_rad if meta.mount == "angle" else None,
        "mass_below_sensor_kg": meta.mass_below_sensor_kg or 0.0,
    }


def _temperature_range(data: FitInput) -> dict[str, Any]:
    if not data.channel.has_temperature:
        return {"temp_min_C": 12.0, "temp_max_C": 32.0, "temperature_tested": False}
    seen = np.concatenate([data.channel.temp_C[a:b] for a, b in zip(data.rows.start, data.rows.stop, strict=True)])
    return {
        "temp_min_C": round(float(seen.min()), 2),
        "temp_max_C": round(float(seen.max()), 2),
        "temperature_tested": data.temperatures > 1,
    }


def _budget(
    data: FitInput, best: Candidate, rows: Rows, uncertainty: RuntimeUncertainty, covariance: FloatArray
) -> list[dict[str, Any]]:
    """Return the sources of uncertainty at the top of the range, each counted once."""
    top = float(rows.target.max())
    highest = best.fitted.features[int(np.argmax(rows.target))]
    full_scale_N = data.capacity_N
    gravity = data.place.gravity_u_m_per_s2 / data.place.gravity_m_per_s2
    fixed = _without(uncertainty.fixed, DAY_ZERO[data.kind])
    relative = _without(uncertainty.relative, DAY_SPAN[data.kind], gravity)
    lines = [
        ("fit (parameters)", float(np.sqrt(highest @ covariance @ highest)), "A", "covariance of the coefficients"),
        ("local gravity", gravity * top, "B", f"{data.place.gravity_m_per_s2:g} m/s2, relative {gravity:.1e}"),
        ("fixed error left over", fixed, "A", "cycles and load levels left out"),
        ("error in proportion to load", relative * top, "A", "cycles and load levels left out, untested temperature"),
        ("noise of one sample", uncertainty.noise, "A", "opening zero"),
        ("zero between days", DAY_ZERO[data.kind], "B", "stated default, common practice, no source"),
        ("span between days", DAY_SPAN[data.kind] * top, "B", "stated default, common practice, no source"),
    ]
    return [{"source": s, "u_N": u * full_scale_N, "kind": kind, "basis": basis} for s, u, kind, basis in lines]


def _without(whole: float, *parts: float) -> float:
    """Return what is left of a root sum of squares when some of its parts are named apart."""
    return float(np.sqrt(max(whole**2 - sum(part**2 for part in parts), 0.0)))


def _sessions(data: FitInput) -> list[dict[str, Any]]:
    used = []
    for number, session in enumerate(data.sessions):
        meta = session.meta
        used.append(
            {
                "name": session.name,
                "sha256": session.digest or "0" * 64,
                "start_utc": meta.start_utc.isoformat() if meta.start_utc else None,
                "recipe": meta.recipe,
                "recipe_sha256": meta.recipe_sha256,
                "operator": meta.operator,
                "weights": ", ".join(str(weight.get("name", "?")) for weight in meta.weights) or None,
                "samples": len(session.t_s),
                "holds": int(np.sum(data.session_of == number)),
                "corrected": [one.words() for one in data.corrections if one.session == number],
            }
        )
    return used


def _start(data: FitInput) -> str | None:
    start = data.sessions[-1].meta.start_utc
    return start.isoformat() if start else None


def _finite(value: float) -> float | None:
    return value if np.isfinite(value) else None
