"""A simulated bench session of one foot, as a careful person would hold it (invented data)."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.handling import ForceHistory, knock, pumping
from footcal.sim.loads import Box, Load, draw_box, uneven
from footcal.sim.script import Script, temperature_C
from footcal.sim.sensor_chain import SimulatedSensor

PARTS: Final = ("presses", "cycles", "minor", "quick", "pump", "cold", "hot")  # in the order they are done
STATIC_ONLY: Final = ("presses", "cycles", "minor", "cold", "hot")
SHORT: Final = ("presses", "cycles", "quick")
COLD_C: Final = 8.0
HOT_C: Final = 38.0
SOAK_s: Final = 2400.0
MINOR_TURNS: Final = 14
QUICK_LIFTS: Final = 12
PUMP_s: Final = 40.0
KNOCKS: Final = 6
REFERENCE_RATE_Hz: Final = 200.0
REFERENCE_NOISE: Final = 1e-4  # of capacity, rms


@dataclass(frozen=True, slots=True, eq=False)
class SimulatedSession:
    """What a session leaves behind, and the truth nobody at the bench knows."""

    meta: dict[str, object]  # keys of session.toml
    readings: dict[str, FloatArray]  # t_s, raw, temp_C, and ref_N where a reference cell was sampled alongside
    steps: dict[str, list[object]]  # columns of steps.csv
    reference: dict[str, FloatArray] | None  # t_ref_s, ref_N of a reference cell on its own clock
    force_N: FloatArray  # (n,) true force at each reading, for a massless foot
    body_C: FloatArray  # (n,) true temperature of the sensor body
    clock_offset_s: float  # what the reference cell's clock shows less the true time
    history: ForceHistory


def run_session(
    sensor: SimulatedSensor,
    rng: np.random.Generator,
    *,
    foot_id: str = "SIM-0001",
    parts: Collection[str] = PARTS,
    weight_class: str | None = None,
    mount: str = "foot_up",
    mass_below_sensor_kg: float = 0.0,
    mount_angle_rad: float = 0.0,
    reference: str = "column",
    clock_offset_s: float | None = None,
    rate_Hz: float | None = None,
    dwell_s: float = 6.0,
    cycles: int = 3,
    start_utc: str = "2031-04-02T08:00:00Z",
) -> SimulatedSession:
    """Return a bench session: presses, up/down cycles, a minor-loop cycle, quick lifts, pump with knocks, cold, hot.

    Every placement senses its own share more or less; masses are exact, or off as their class allows.

    Args:
        sensor: the foot; it is not changed.
        rng: draws loads, handling, placements and noise.
        foot_id: serial number to write into the session.
        parts: which of `PARTS` to do.
        weight_class: an OIML class whose limits the weights use up, or None for exact masses.
        mount: foot_up, foot_down, side or angle.
        mass_below_sensor_kg: hangs on (foot_down) or rests on (foot_up) the sensor, also at zero.
        mount_angle_rad: sensor axis (sole to leg) from straight up, where mount is angle.
        reference: "column" (`ref_N` beside each reading) or "file" (its own rate and clock); used by the pump only.
        clock_offset_s: of the reference cell's clock; drawn within ±20 ms where not given.
        rate_Hz: readings per second; the converter's usual rate where not given.
        dwell_s: how long each load stands.
        cycles: up/down cycles at 22 °C.
        start_utc: written into the session.

    Raises:
        SettingError: an unknown part, mount or kind of reference.
    """
    _check(parts, mount, reference)
    box = draw_box(rng, weight_class)
    rest_N = _rest_N(mount, mass_below_sensor_kg, box, mount_angle_rad)
    offset_s = float(rng.uniform(-0.02, 0.02)) if clock_offset_s is None else clock_offset_s
    count = int(rng.integers(5, 7)) if sensor.sheet.transducer == "cell" else int(rng.integers(8, 10))
    loads = box.loads(sensor.capacity_N, uneven(rng, count))
    script = Script(rng=rng, placement_share=sensor.placement_share, dwell_s=dwell_s)
    _perform(script, sensor, box, loads, parts, cycles)
    history = script.history(rest_N)
    t_s = script.reading_times(rate_Hz or sensor.rate_Hz)
    body_C = temperature_C(t_s, script.temperatures, rng)
    readings = {
        "t_s": t_s,
        "raw": read(sensor, t_s, history, body_C, rng),
        "temp_C": sensor.thermometer(t_s, body_C, rng),
    }
    ref = _reference(script, history, t_s, offset_s, reference, sensor.capacity_N, rng) if "pump" in parts else {}
    if "t_ref_s" not in ref:
        readings |= ref
    meta = session_meta(sensor, box, foot_id, mount, mass_below_sensor_kg, start_utc)
    if mount == "angle":
        meta["mount_angle_rad"] = mount_angle_rad
    return SimulatedSession(
        meta=meta,
        readings=readings,
        steps=script.steps,
        reference=ref if "t_ref_s" in ref else None,
        force_N=history.force_N(t_s, sensed=False),
        body_C=body_C,
        clock_offset_s=offset_s,
        history=history,
    )


def read(
    sensor: SimulatedSensor, t_s: FloatArray, history: ForceHistory, body_C: FloatArray, rng: np.random.Generator
) -> FloatArray:
    """Return the counts at reading times (n,), moving loads followed between them on a grid of 2 ms."""
    fine_s = history.fine_times(t_s)
    return sensor.sample(t_s, fine_s, history.force_N(fine_s, sensed=True), np.interp(fine_s, t_s, body_C), rng)


def _perform(
    script: Script, sensor: SimulatedSensor, box: Box, loads: list[Load], parts: Collection[str], cycles: int
) -> None:
    script.zero(cycle=0)
    if "presses" in parts:
        for _ in range(3):
            script.put(loads[-1], cycle=0, direction="up", kind="press", dwell_s=3.0)
            script.zero(cycle=0)
    cycle = 0
    for _ in range(cycles if "cycles" in parts else 0):
        cycle += 1
        up_down(script, loads, cycle)
    if "minor" in parts:
        cycle += 1
        minor_loops(script, box, sensor.capacity_N, cycle)
    if "quick" in parts:
        quick_lifts(script, box, sensor.capacity_N, cycle + 1)
        cycle += 1
    if "pump" in parts:
        pump(script, sensor.capacity_N, cycle + 1)
        cycle += 1
    for part, set_C, series in (("cold", COLD_C, "2"), ("hot", HOT_C, "3")):
        if part in parts:
            cycle += 1
            script.soak(SOAK_s, set_C, series)
            script.zero(cycle=cycle)
            up_down(script, loads, cycle)


def up_down(script: Script, loads: list[Load], cycle: int) -> None:
    """Put all loads on one by one, take them off again, and read the zero."""
    for load in loads:
        script.put(load, cycle=cycle, direction="up")
    for load in loads[-2::-1]:
        script.put(load, cycle=cycle, direction="down")
    script.zero(cycle=cycle)


def minor_loops(script: Script, box: Box, capacity_N: float, cycle: int) -> None:
    """Turn back and forth inside the range: shrinking swings about a middle that wanders, some 14 turns."""
    rng = script.rng
    before = 0.0
    for turn in range(MINOR_TURNS):
        high = turn % 2 == 0
        share = rng.uniform(0.5, 0.95) if high else rng.uniform(0.08, 0.45)
        load = box.load(share * capacity_N / box.gravity_m_per_s2)
        script.put(load, cycle=cycle, direction="up" if load.mass_kg > before else "down")
        before = load.mass_kg
    script.zero(cycle=cycle)


def quick_lifts(script: Script, box: Box, capacity_N: float, cycle: int) -> None:
    """Whisk known masses on and off, a second each."""
    for _ in range(QUICK_LIFTS):
        load = box.load(script.rng.uniform(0.15, 0.9) * capacity_N / box.gravity_m_per_s2)
        script.whisk(load, cycle=cycle)
    script.zero(cycle=cycle)


def pump(script: Script, capacity_N: float, cycle: int) -> None:
    """Pump by hand on a reference cell for 40 s, and knock six times so that both clocks can be joined."""
    rng = script.rng
    for _ in range(KNOCKS // 2):
        script.free(knock(rng, 0.0, capacity_N), cycle=cycle, kind="knock")
    script.free(pumping(rng, PUMP_s, capacity_N), cycle=cycle, kind="pump")
    for _ in range(KNOCKS - KNOCKS // 2):
        script.free(knock(rng, 0.0, capacity_N), cycle=cycle, kind="knock")
    script.zero(cycle=cycle)


def _reference(
    script: Script,
    history: ForceHistory,
    t_s: FloatArray,
    offset_s: float,
    form: str,
    capacity_N: float,
    rng: np.random.Generator,
) -> dict[str, FloatArray]:
    """What a reference cell shows while it lies under the foot; its clock shows true time + offset."""
    first, last = script.span_of(("knock", "pump"))
    inside = (t_s >= first) & (t_s <= last)
    shown_s = t_s[inside] if form == "column" else np.arange(first + offset_s, last, 1.0 / REFERENCE_RATE_Hz)
    noise_N = REFERENCE_NOISE * capacity_N * rng.standard_normal(shown_s.size)
    gain, zero_N = 1.0 + 3e-4 * rng.standard_normal(), 3e-4 * capacity_N * rng.standard_normal()
    force_N = history.force_N(shown_s - offset_s, sensed=False)
    seen_N = gain * force_N + zero_N + noise_N
    if form != "column":
        return {"t_ref_s": shown_s, "ref_N": seen_N}
    column = np.full(t_s.size, np.nan)
    column[inside] = seen_N
    return {"ref_N": column}


def _rest_N(mount: str, mass_below_kg: float, box: Box, angle_rad: float) -> float:
    press = {"foot_up": 1.0, "foot_down": -1.0, "side": 0.0, "angle": -np.cos(angle_rad)}[mount]
    return float(press) * box.gravity_m_per_s2 * mass_below_kg


def session_meta(
    sensor: SimulatedSensor, box: Box, foot_id: str, mount: str, mass_below_kg: float, start_utc: str
) -> dict[str, object]:
    """Return what session.toml says of a simulated session."""
    return {
        "foot_id": foot_id,
        "kind": sensor.sheet.transducer,
        "capacity_N": sensor.capacity_N,
        "safe_limit_N": 1.5 * sensor.capacity_N,
        "raw_max": sensor.raw_max,
        "lag_s": sensor.stated_lag_s,
        "mount": mount,
        "mass_below_sensor_kg": mass_below_kg,
        "gravity_m_per_s2": box.gravity_m_per_s2,
        "gravity_u_m_per_s2": 1e-4,
        "operator": "simulated bench",
        "start_utc": start_utc,
        "closed": True,
        "invented": "made by footcal.sim, no real sensor",
    }


def _check(parts: Collection[str], mount: str, reference: str) -> None:
    wrong = [part for part in parts if part not in PARTS]
    if wrong:
        raise SettingError(
            where="run_session, parts", what=f"there is no part {wrong[0]!r}", mend=f"Choose from {', '.join(PARTS)}."
        )
    for name, value, allowed in (
        ("mount", mount, ("foot_up", "foot_down", "side", "angle")),
        ("reference", reference, ("column", "file")),
    ):
        if value not in allowed:
            raise SettingError(
                where=f"run_session, {name}", what=f"{value!r} is not known", mend=f"Choose from {', '.join(allowed)}."
            )
