"""Trials on another day: what a calibrated foot meets after the bench, the true force beside it (invented data)."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.bench import SimulatedSession, read, session_meta
from footcal.sim.loads import draw_box
from footcal.sim.noise import wander
from footcal.sim.script import BENCH_C, Script, temperature_C
from footcal.sim.sensor_chain import SimulatedSensor

CHANNEL_Hz: Final = 1000.0  # the robot's own channel of the same sensor
SOAK_s: Final = 1800.0
REST_s: Final = 5.0  # unloaded start of each trial, long enough for a tare


@dataclass(frozen=True, slots=True, eq=False)
class SimulatedTrial:
    """Readings with the truth."""

    t_s: FloatArray  # (n,)
    raw: FloatArray  # (n,)
    temp_C: FloatArray  # (n,) as the thermometer says
    force_N: FloatArray  # (n,) what really pressed
    scored: FloatArray  # (n,) 1 where the reading counts: settled holds (static), foot on the ground (stance), else 0
    hold: FloatArray  # (n,) number of the hold or stance the reading belongs to, from 1; 0 outside


def static_trial(sensor: SimulatedSensor, rng: np.random.Generator, *, holds: int = 24) -> SimulatedTrial:
    """Return holds of 6 s of any load in any order, in three sets, each at its own temperature from 14 to 30 °C.

    Between the sets there are no readings for half an hour. The day's shift is the caller's: give `sensor.day(rng)`.
    """
    box = draw_box(rng)
    levels_C = [float(level_C) for level_C in rng.uniform(14.0, 30.0, 3)]
    script = Script(rng=rng, placement_share=sensor.placement_share, now_s=REST_s, temperatures=[(0.0, levels_C[0])])
    for k in range(holds):
        if k > 0 and k % (holds // 3) == 0 and len(script.temperatures) < 3:
            script.zero(cycle=len(script.temperatures))
            script.soak(SOAK_s, levels_C[len(script.temperatures)], str(len(script.temperatures) + 1))
        load = box.load(rng.uniform(0.04, 0.95) * sensor.capacity_N / box.gravity_m_per_s2)
        direction = "up" if load.mass_kg > script.mass_kg else "down"
        script.put(load, cycle=len(script.temperatures), direction=direction)
    script.zero(cycle=3)
    history = script.history(0.0)
    t_s = script.reading_times(sensor.rate_Hz)
    body_C = temperature_C(t_s, script.temperatures, rng)
    raw = read(sensor, t_s, history, body_C, rng)
    hold = np.zeros(t_s.size)
    for number, (begin, end) in enumerate(zip(script.steps["t_start_s"], script.steps["t_end_s"], strict=True), 1):
        hold[(t_s >= float(str(begin))) & (t_s <= float(str(end)))] = number
    force_N = history.force_N(t_s, sensed=False)
    return SimulatedTrial(t_s, raw, sensor.thermometer(t_s, body_C, rng), force_N, (hold > 0.0).astype(float), hold)


def stance_trial(sensor: SimulatedSensor, rng: np.random.Generator, *, lasts_s: float = 60.0) -> SimulatedTrial:
    """Return walking through a 1 kHz channel: impacts at touchdown, peaks from 0.3 to 0.9 of full scale.

    Each footfall is a placement of its own. The day's shift is the caller's: give `sensor.day(rng)`.
    """
    t_s = np.arange(0.0, REST_s + lasts_s, 1.0 / CHANNEL_Hz)
    force_N, felt_N, stance = np.zeros(t_s.size), np.zeros(t_s.size), np.zeros(t_s.size)
    now_s, number = REST_s, 0
    while now_s < REST_s + lasts_s - 2.0:
        number += 1
        ground_s = float(rng.uniform(0.25, 0.8))
        first, last = np.searchsorted(t_s, [now_s, now_s + ground_s])
        shape_N = footfall_N(t_s[first:last] - now_s, ground_s, sensor.capacity_N, rng)
        force_N[first:last] = shape_N
        felt_N[first:last] = shape_N * (1.0 + sensor.placement_share * rng.standard_normal())
        stance[first:last] = number
        now_s += ground_s + float(rng.uniform(0.2, 0.5))
    body_C = float(rng.uniform(14.0, 30.0)) + 0.2 * wander(t_s, np.array([60.0, 300.0]), rng)
    raw = sensor.on_channel(CHANNEL_Hz).respond(t_s, felt_N, body_C, rng)
    temp_C = sensor.thermometer(t_s, body_C, rng)
    return SimulatedTrial(t_s, raw, temp_C, force_N, (stance > 0.0).astype(float), stance)


def stand_trial(sensor: SimulatedSensor, rng: np.random.Generator, *, lasts_s: float = 600.0) -> SimulatedTrial:
    """Return ten minutes of standing with small shifts of weight, at the converter's usual rate.

    The day's shift is the caller's: give `sensor.day(rng)`.
    """
    t_s = np.arange(0.0, REST_s + lasts_s, 1.0 / sensor.rate_Hz)
    share = float(rng.uniform(0.25, 0.55)) * (1.0 + 0.05 * wander(t_s, np.array([0.5, 3.0, 30.0]), rng))
    for _ in range(int(lasts_s / 60.0)):
        begin_s = rng.uniform(REST_s, REST_s + lasts_s)
        share = share * (1.0 + rng.uniform(-0.25, 0.25) * _smooth((t_s - begin_s) / 0.6))
    standing = _smooth((t_s - REST_s) / 0.5)
    force_N = sensor.capacity_N * np.clip(share, 0.02, 0.95) * standing
    felt_N = force_N * (1.0 + sensor.placement_share * rng.standard_normal())
    body_C = float(rng.uniform(14.0, 30.0)) + 0.5 * wander(t_s, np.array([120.0, 600.0]), rng)
    raw = sensor.respond(t_s, felt_N, body_C, rng)
    on = (t_s > REST_s + 1.0).astype(float)
    return SimulatedTrial(t_s, raw, sensor.thermometer(t_s, body_C, rng), force_N, on, on)


def footfall_N(since_s: FloatArray, ground_s: float, full_N: float, rng: np.random.Generator) -> FloatArray:
    """Return the axial force of one footfall (n,): impact, first hump, dip, second hump, push-off.

    Humps of a slow walk, one hump of a trot, or anything between, with a peak from 0.3 to 0.9 of full scale. A rubber
    foot set down at some decimetres a second rises to its impact peak in 10 to 22 ms (common practice, no source).
    """
    x = np.clip(since_s / ground_s, 0.0, 1.0)
    hump, dip = np.sin(np.pi * x), rng.uniform(0.0, 0.35)
    body = hump * (1.0 - dip * hump**4) * (1.0 + rng.uniform(-0.15, 0.15) * (x - 0.5))
    struck_s, decay_s = rng.uniform(0.02, 0.045), rng.uniform(0.008, 0.02)
    impact = rng.uniform(0.1, 0.6) * np.sin(np.pi * np.minimum(since_s / struck_s, 1.0)) ** 2
    ringing = rng.uniform(0.0, 0.1) * np.exp(-since_s / decay_s) * np.sin(2.0 * np.pi * rng.uniform(30, 70) * since_s)
    together = np.maximum(body + impact + ringing, 0.0)
    peak_N = full_N * rng.uniform(0.3, 0.9)
    result: FloatArray = peak_N * together / together.max()
    return result


def check_session(
    sensor: SimulatedSensor,
    rng: np.random.Generator,
    *,
    foot_id: str = "SIM-0001",
    span_change: float = 0.0,
    zero_change: float = 0.0,
    noise_factor: float = 1.0,
    weight_class: str | None = None,
    rate_Hz: float | None = None,
    temp_C: float = BENCH_C,
    start_utc: str = "2031-04-09T08:00:00Z",
) -> SimulatedSession:
    """Return a weekly check of some 1.5 minutes: one press, zero, three loads up and two down, zero.

    Args:
        sensor: the foot as calibrated; its ageing since then is given by the next three.
        rng: draws the day's shift, handling, placements and noise.
        foot_id: serial number to write into the session.
        span_change: change of the reading per force, a share.
        zero_change: shift of the unloaded reading, share of full output.
        noise_factor: noise against that of the new sensor.
        weight_class: an OIML class whose limits the weights use up, or None for exact masses.
        rate_Hz: readings per second; the converter's usual rate where not given.
        temp_C: of the room.
        start_utc: written into the session.
    """
    aged = sensor.day(rng).aged(span=span_change, zero=zero_change, noise=noise_factor)
    box = draw_box(rng, weight_class)
    script = Script(rng=rng, placement_share=sensor.placement_share, temperatures=[(0.0, temp_C)])
    low, middle, high = box.loads(sensor.capacity_N, (0.2, 0.5, 0.8))
    script.put(high, cycle=0, direction="up", kind="press", dwell_s=3.0)
    script.zero(cycle=1)
    for load in (low, middle, high):
        script.put(load, cycle=1, direction="up")
    for load in (middle, low):
        script.put(load, cycle=1, direction="down")
    script.zero(cycle=1)
    history = script.history(0.0)
    t_s = script.reading_times(rate_Hz or sensor.rate_Hz)
    body_C = temperature_C(t_s, script.temperatures, rng)
    readings = {
        "t_s": t_s,
        "raw": read(aged, t_s, history, body_C, rng),
        "temp_C": sensor.thermometer(t_s, body_C, rng),
    }
    return SimulatedSession(
        meta=session_meta(sensor, box, foot_id, "foot_up", 0.0, start_utc),
        readings=readings,
        steps=script.steps,
        reference=None,
        force_N=history.force_N(t_s, sensed=False),
        body_C=body_C,
        clock_offset_s=0.0,
        history=history,
    )


def _smooth(x: FloatArray) -> FloatArray:
    """Return 0 before 0, 1 after 1, and a smooth rise between."""
    inside = np.clip(x, 0.0, 1.0)
    result: FloatArray = inside * inside * (3.0 - 2.0 * inside)
    return result
