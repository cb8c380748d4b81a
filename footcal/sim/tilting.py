"""A simulated bench session on wedges: the foot leans, so a load presses it sideways as well (invented data)."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.bench import SimulatedSession, session_meta
from footcal.sim.handling import ForceHistory
from footcal.sim.loads import draw_box
from footcal.sim.script import Script, temperature_C
from footcal.sim.sensor_chain import SimulatedSensor

WEDGES_deg: Final = (15.0, 30.0)
TURNS: Final = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))  # about sensor x and y
LOAD_SHARES: Final = (0.3, 0.6, 0.9)  # of capacity, along the vertical
WEDGE_ERROR_deg: Final = 0.5  # standard deviation of a wedge's slope, bench included; the foot is turned, not the wedge
SEAT_ERROR_deg: Final = 0.1  # of each time the foot is set on it
CLIP: Final = 2.0  # standard deviations


@dataclass(frozen=True, slots=True)
class Posture:
    """How the foot stood from a time on."""

    from_s: float
    noted_deg: tuple[float, float]  # about sensor x, then y
    load_share: FloatArray  # (3,) of a vertical load along sensor x, y, axis, as it truly stood


def run_tilted(
    sensor: SimulatedSensor,
    rng: np.random.Generator,
    *,
    foot_id: str = "SIM-0001",
    wedges_deg: tuple[float, ...] = WEDGES_deg,
    turns: tuple[tuple[float, float], ...] = TURNS,
    wedge_error_deg: float = WEDGE_ERROR_deg,
    seat_error_deg: float = SEAT_ERROR_deg,
    mass_below_sensor_kg: float = 0.0,
    start_utc: str = "2031-04-02T10:00:00Z",
) -> SimulatedSession:
    """Return a session: three presses and three loads on the flat, then zero and three loads in each wedge posture.

    Steps on a wedge have kind `tilted` and the nominal angles; the true ones are off by the wedge's own error, the same
    in all its turns, and by that of setting the foot down. `force_N` of the result is the axial part.

    Args:
        sensor: the foot; it is not changed.
        rng: draws handling, angles, placements and noise.
        foot_id: serial number to write into the session.
        wedges_deg: slopes.
        turns: rotations about sensor x and y, in units of the wedge's slope.
        wedge_error_deg: standard deviation of a wedge's slope.
        seat_error_deg: standard deviation of each setting down, about x and about y.
        mass_below_sensor_kg: rests on the sensor of the inverted foot, also at zero.
        start_utc: written into the session.
    """
    box = draw_box(rng)
    loads = box.loads(sensor.capacity_N, LOAD_SHARES)
    script = Script(rng=rng, placement_share=sensor.placement_share)
    postures = [Posture(0.0, (0.0, 0.0), pressed_along(0.0, 0.0))]
    noted: list[tuple[float, float]] = []

    def stand(kind: str, direction: str = "up") -> None:
        script.zero(cycle=len(postures))
        script.steps["kind"][-1] = "tilted" if kind == "tilted" else "hold"
        for load in loads:
            script.put(load, cycle=len(postures), direction=direction, kind=kind)
        noted.extend([postures[-1].noted_deg] * (len(script.steps["step"]) - len(noted)))

    script.zero(cycle=0)
    for _ in range(3):
        script.put(loads[-1], cycle=0, direction="up", kind="press", dwell_s=3.0)
    stand("hold")
    for slope_deg in wedges_deg:
        true_deg = slope_deg + wedge_error_deg * _clipped(rng)
        for x, y in turns:
            seat_x, seat_y = (seat_error_deg * _clipped(rng) for _ in range(2))
            script.zero(cycle=len(postures))
            noted.append(postures[-1].noted_deg)
            script.steps["kind"][-1] = "tilted" if len(postures) > 1 else "hold"
            script.now_s += 4.0  # the foot is taken off and set on the wedge
            along = pressed_along(x * true_deg + seat_x, y * true_deg + seat_y)
            postures.append(Posture(script.now_s - 2.0, (x * slope_deg, y * slope_deg), along))
            stand("tilted")
    script.zero(cycle=len(postures))
    script.steps["kind"][-1] = "tilted"
    noted.append(postures[-1].noted_deg)
    return _read(
        sensor,
        rng,
        script,
        postures,
        noted,
        session_meta(sensor, box, foot_id, "foot_up", mass_below_sensor_kg, start_utc),
        box.gravity_m_per_s2 * mass_below_sensor_kg,
    )


def pressed_along(tilt_x_deg: float, tilt_y_deg: float) -> FloatArray:
    """Return the share of a vertical load along x, y and axis of a foot turned about its x, then its y, (3,)."""
    a, b = np.radians([tilt_x_deg, tilt_y_deg])
    about_x = np.array([[1.0, 0.0, 0.0], [0.0, np.cos(a), -np.sin(a)], [0.0, np.sin(a), np.cos(a)]])
    about_y = np.array([[np.cos(b), 0.0, np.sin(b)], [0.0, 1.0, 0.0], [-np.sin(b), 0.0, np.cos(b)]])
    result: FloatArray = (about_x @ about_y).T @ np.array([0.0, 0.0, 1.0])
    return result


def _clipped(rng: np.random.Generator) -> float:
    return float(np.clip(rng.standard_normal(), -CLIP, CLIP))


def _read(
    sensor: SimulatedSensor,
    rng: np.random.Generator,
    script: Script,
    postures: list[Posture],
    noted: list[tuple[float, float]],
    meta: dict[str, object],
    rest_N: float,
) -> SimulatedSession:
    history: ForceHistory = script.history(rest_N)
    t_s = script.reading_times(sensor.rate_Hz)
    fine_s = history.fine_times(t_s)
    body_C = temperature_C(t_s, script.temperatures, rng)
    felt_N = history.force_N(fine_s, sensed=True)[:, None] * _shares(postures, fine_s)
    raw = sensor.sample(t_s, fine_s, felt_N[:, 2], np.interp(fine_s, t_s, body_C), rng, felt_N[:, :2])
    steps: dict[str, list[object]] = {
        **script.steps,
        "tilt_x_deg": [x for x, _ in noted],
        "tilt_y_deg": [y for _, y in noted],
    }
    return SimulatedSession(
        meta=meta,
        readings={"t_s": t_s, "raw": raw, "temp_C": sensor.thermometer(t_s, body_C, rng)},
        steps=steps,
        reference=None,
        force_N=history.force_N(t_s, sensed=False) * _shares(postures, t_s)[:, 2],
        body_C=body_C,
        clock_offset_s=0.0,
        history=history,
    )


def _shares(postures: list[Posture], t_s: FloatArray) -> FloatArray:
    """Return the posture's shares at each time, (n, 3)."""
    starts = np.array([posture.from_s for posture in postures])
    table = np.stack([posture.load_share for posture in postures])
    result: FloatArray = table[np.maximum(np.searchsorted(starts, t_s, side="right") - 1, 0)]
    return result
