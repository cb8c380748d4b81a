"""Faults of people and wires, put into a simulated session, each with a label that says what was done and where."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final, Literal

import numpy as np

from footcal.errors import SettingError
from footcal.records import FloatArray
from footcal.sim.bench import SimulatedSession, read
from footcal.sim.handling import ForceHistory, Waggle
from footcal.sim.sensor_chain import SimulatedSensor

FaultKind = Literal["spike", "bump", "tug", "slow", "wrong_mass"]
SLIPS_kg: Final = (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0)  # a piece forgotten, or counted twice


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that went wrong."""

    kind: FaultKind
    step: int  # number in the steps table; 0 where it belongs to no step (spikes)
    t_s: float  # when it began
    size: float  # N for bump and tug, s for slow, kg for wrong_mass (entered less true), counts for spike


def injected(
    session: SimulatedSession,
    sensor: SimulatedSensor,
    rng: np.random.Generator,
    *,
    spikes: int = 0,
    bumps: int = 0,
    tugs: int = 0,
    slow: int = 0,
    wrong_masses: int = 0,
    size_share: float = 0.03,
) -> tuple[SimulatedSession, tuple[Fault, ...]]:
    """Return the session as it would have been with these faults, and what they were, in order of time.

    Each step gets one fault at most; only held loads are chosen. The readings are taken anew, with other noise.

    Args:
        session: a session without faults; it is not changed.
        sensor: the foot it was made with.
        rng: chooses steps and sizes.
        spikes: readings with one flipped bit.
        bumps: knocks against the bench within a settled window, 0.2 to 0.6 s long.
        tugs: the cable pulls or pushes from within the first part of a dwell until the load is changed.
        slow: the load is still creeping into place for 2 to 3 s after the note says it stands.
        wrong_masses: a mass entered with a piece too many or too few.
        size_share: least size of bumps, tugs and wrong masses, share of capacity; the largest is twice that.

    Raises:
        SettingError: more faults than held loads.
    """
    chosen = _choose_steps(session, rng, bumps + tugs + slow + wrong_masses)
    counts: dict[FaultKind, int] = {"bump": bumps, "tug": tugs, "slow": slow, "wrong_mass": wrong_masses}
    kinds = [kind for kind, count in counts.items() for _ in range(count)]
    faults: list[Fault] = []
    history, steps = session.history, {name: list(column) for name, column in session.steps.items()}
    for row, kind in zip(chosen, kinds, strict=True):
        size_N = sensor.capacity_N * size_share * float(rng.uniform(1.0, 2.0)) * float(rng.choice([-1.0, 1.0]))
        if kind == "bump":
            history, fault = _bump(history, steps, row, size_N, rng)
        elif kind == "tug":
            history, fault = _tug(history, steps, row, size_N, rng)
        elif kind == "slow":
            history, fault = _slow(history, steps, row, rng)
        else:
            fault = _wrong_mass(steps, row, size_N, rng)
        faults.append(fault)
    t_s = session.readings["t_s"]
    raw = read(sensor, t_s, history, session.body_C, rng)
    raw, flipped = _spikes(raw, t_s, sensor, spikes, rng)
    changed = replace(
        session,
        readings={**session.readings, "raw": raw},
        steps=steps,
        history=history,
        force_N=history.force_N(t_s, sensed=False),
    )
    return changed, tuple(sorted([*faults, *flipped], key=lambda fault: fault.t_s))


def _choose_steps(session: SimulatedSession, rng: np.random.Generator, count: int) -> list[int]:
    kinds, directions = session.steps["kind"], session.steps["direction"]
    held = [i for i, kind in enumerate(kinds) if kind == "hold" and directions[i] != "zero"]
    if count > len(held):
        raise SettingError(
            where="injected", what=f"{count} faults for {len(held)} held loads", mend="Ask for fewer, or more cycles."
        )
    return [int(i) for i in rng.choice(held, size=count, replace=False)]


def _number(steps: dict[str, list[object]], name: str, row: int) -> float:
    return float(str(steps[name][row]))


def _step(steps: dict[str, list[object]], row: int) -> int:
    return int(_number(steps, "step", row))


def _bump(
    history: ForceHistory, steps: dict[str, list[object]], row: int, size_N: float, rng: np.random.Generator
) -> tuple[ForceHistory, Fault]:
    lasts_s = float(rng.uniform(0.2, 0.6))
    start_s = float(rng.uniform(_number(steps, "t_start_s", row), _number(steps, "t_end_s", row) - lasts_s))
    t_s = np.linspace(0.0, lasts_s, 31)
    waggle = Waggle(start_s, t_s, size_N * np.sin(np.pi * t_s / lasts_s))
    changed = replace(history, waggles=(*history.waggles, waggle))
    return changed, Fault("bump", _step(steps, row), start_s, size_N)


def _tug(
    history: ForceHistory, steps: dict[str, list[object]], row: int, size_N: float, rng: np.random.Generator
) -> tuple[ForceHistory, Fault]:
    loaded_s, end_s = _number(steps, "t_load_s", row), _number(steps, "t_end_s", row)
    start_s = loaded_s + float(rng.uniform(0.0, 0.5)) * (end_s - loaded_s)
    gone_s = end_s - start_s + 0.2
    waggle = Waggle(
        start_s, np.array([0.0, 0.2, gone_s, gone_s + 0.2]), size_N * np.array([0.0, 1.0, 1.0, 0.0]), felt_only=True
    )
    changed = replace(history, waggles=(*history.waggles, waggle))
    return changed, Fault("tug", _step(steps, row), start_s, size_N)


def _slow(
    history: ForceHistory, steps: dict[str, list[object]], row: int, rng: np.random.Generator
) -> tuple[ForceHistory, Fault]:
    loaded_s = _number(steps, "t_load_s", row)
    late_s = float(rng.uniform(2.0, 3.0))
    at = int(np.argmin([abs(move.end_s - loaded_s) for move in history.moves]))
    moves = list(history.moves)
    moves[at] = replace(moves[at], lasts_s=moves[at].lasts_s + late_s)
    return replace(history, moves=tuple(moves)), Fault("slow", _step(steps, row), loaded_s, late_s)


def _wrong_mass(steps: dict[str, list[object]], row: int, size_N: float, rng: np.random.Generator) -> Fault:
    true_kg = _number(steps, "mass_kg", row)
    large = [slip for slip in SLIPS_kg if slip * 9.81 >= abs(size_N)][:2]
    slip_kg = float(rng.choice(large)) * (1.0 if size_N > 0.0 or true_kg <= large[-1] else -1.0)
    steps["mass_kg"][row] = round(true_kg + slip_kg, 6)
    return Fault("wrong_mass", _step(steps, row), _number(steps, "t_load_s", row), slip_kg)


def _spikes(
    raw: FloatArray, t_s: FloatArray, sensor: SimulatedSensor, count: int, rng: np.random.Generator
) -> tuple[FloatArray, list[Fault]]:
    """Flip one of the upper eight bits in some readings; a flipped count stays a count of the converter."""
    spiked = raw.copy()
    faults: list[Fault] = []
    for i in rng.choice(raw.size, size=count, replace=False):
        whole = int(raw[i]) - int(sensor.converter.lowest)
        flipped = whole ^ (1 << (sensor.sheet.adc_bits - 1 - int(rng.integers(0, 8))))
        spiked[i] = float(flipped + int(sensor.converter.lowest))
        faults.append(Fault("spike", 0, float(t_s[i]), float(spiked[i] - raw[i])))
    return spiked, faults
