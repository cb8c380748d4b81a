"""From the steps of a session to holds with their force: local gravity, buoyancy and mounting counted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from footcal.errors import SessionError
from footcal.files.session import Session
from footcal.files.session_meta import SessionMeta
from footcal.physics.force import mass_force
from footcal.physics.gravity import STANDARD_GRAVITY_m_per_s2
from footcal.records import FloatArray, Hold

AXIS_UP_SHARE = {"foot_down": 1.0, "foot_up": -1.0, "side": 0.0}  # cosine of sensor axis (sole to leg) and up


@dataclass(frozen=True, slots=True)
class BenchPlace:
    """What turns a mass on this bench into a force on the sensor."""

    gravity_m_per_s2: float
    gravity_u_m_per_s2: float
    zero_N: float  # axial force of what hangs below the sensor, for a massless foot
    assumed: tuple[str, ...]  # what nobody said, in words


def bench_place(meta: SessionMeta) -> BenchPlace:
    """Return gravity and the zero's force of a session, saying what had to be assumed.

    The weight below the sensor acts along the axis as in DESIGN 8: axial = h . (F + m_d g), so a hanging foot
    (axis up) reads -m_d g and an inverted one +m_d g.
    """
    assumed = []
    gravity, gravity_u = meta.gravity_m_per_s2, meta.gravity_u_m_per_s2
    if gravity is None:
        gravity, gravity_u = STANDARD_GRAVITY_m_per_s2, 0.015
        assumed.append("local gravity was not given: 9.80665 m/s2 with a standard uncertainty of 0.015 m/s2 is used")
    mass_kg = meta.mass_below_sensor_kg
    if meta.mount is None:
        assumed.append("mount was not given: the zero is that of the foot as it hung or stood on the bench")
        zero_N = 0.0
    else:
        if mass_kg is None:
            assumed.append("mass_below_sensor_kg was not given: taken as 0")
        up = np.cos(meta.mount_angle_rad or 0.0) if meta.mount == "angle" else AXIS_UP_SHARE[meta.mount]
        zero_N = -float(up) * (mass_kg or 0.0) * gravity
    return BenchPlace(gravity, gravity_u if gravity_u is not None else 0.0005, zero_N, tuple(assumed))


def load_direction(tilt_x_deg: float, tilt_y_deg: float) -> FloatArray:
    """Return along which way a load presses a tilted foot, sensor x, y, z, shape (3,), length 1.

    The third row of R_x(a) R_y(b), which is what the load's direction becomes in the turned frame.
    """
    a, b = np.radians(tilt_x_deg), np.radians(tilt_y_deg)
    return np.array([-np.cos(a) * np.sin(b), np.sin(a), np.cos(a) * np.cos(b)])


def holds_of(session: Session, place: BenchPlace, least_loads: int = 2) -> list[Hold]:
    """Return the holds of a session in order of time, each with the force on the sensor and its uncertainty.

    A tilted hold's load acts along the vertical, and so does the weight below the sensor; `load_N` is the axial part.

    Args:
        session: with steps.
        place: gravity and mounting of the bench.
        least_loads: how many different loads there must be; a curve needs two, a check one.

    Raises:
        SessionError: too few different loads, or tilted steps in a mount where the weight below the sensor pulls aside.
    """
    rows = session.steps[~session.steps["kind"].isin(["pump", "knock"])]
    if (
        session.meta.mount in {"side", "angle"}
        and session.meta.mass_below_sensor_kg
        and (rows["kind"] == "tilted").any()
    ):
        raise SessionError(
            f"{session.name}, steps",
            f"tilted steps with mount {session.meta.mount}: which way the weight below the sensor pulls is not known",
            "Tilt the foot out of foot_up or foot_down.",
        )
    holds = [_hold(row, place) for _, row in rows.iterrows()]
    check_loads(holds, session.name, least_loads)
    return holds


def check_loads(holds: Sequence[Hold], name: str, least_loads: int = 2) -> None:
    """Refuse holds with too few different loads.

    Raises:
        SessionError: names what a good session has.
    """
    loads = {round(hold.load_N, 2) for hold in holds if hold.direction != "zero"}
    if len(loads) < least_loads:
        raise SessionError(
            f"{name}, steps",
            f"{len(loads) or 'no'} load only; a curve needs at least two, a good session five (cells) or eight (pads)",
            "Run a session with more loads.",
        )


def _hold(values: pd.Series, place: BenchPlace) -> Hold:
    mass_kg, load_N = float(values["mass_kg"]), float(values["load_N"])
    if values["direction"] == "zero":
        force_N, u_N = 0.0, 0.0
    elif np.isfinite(load_N):
        force_N, u_N = load_N, 0.0
    else:
        force = mass_force(
            mass_kg, gravity_m_per_s2=place.gravity_m_per_s2, gravity_u_m_per_s2=place.gravity_u_m_per_s2
        )
        force_N, u_N = force.force_N, force.u_N
    tilt_x_deg, tilt_y_deg = float(values["tilt_x_deg"]), float(values["tilt_y_deg"])
    side_x, side_y, axial = (float(share) for share in load_direction(tilt_x_deg, tilt_y_deg))
    return Hold(
        step=int(values["step"]),
        cycle=int(values["cycle"]),
        direction=str(values["direction"]),
        kind=str(values["kind"]),
        t_start_s=float(values["t_start_s"]),
        t_end_s=float(values["t_end_s"]),
        t_load_s=float(values["t_load_s"]),
        load_N=(force_N + place.zero_N) * axial,
        load_u_N=u_N * axial,
        mass_kg=mass_kg,
        side_x_N=(force_N + place.zero_N) * side_x,
        side_y_N=(force_N + place.zero_N) * side_y,
        tilt_x_deg=tilt_x_deg,
        tilt_y_deg=tilt_y_deg,
    )
