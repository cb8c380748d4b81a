"""The written course of a simulated bench: each call puts something on, waits as people do, and notes the step."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass, field, replace
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.handling import ForceHistory, Move, Waggle, set_down
from footcal.sim.loads import Load
from footcal.sim.noise import wander

BENCH_C: Final = 22.0
SETTLE_s: Final = 0.9  # from the end of the movement to the start of the noted window
COLUMNS: Final = (
    "step",
    "cycle",
    "direction",
    "t_start_s",
    "t_end_s",
    "mass_kg",
    "load_N",
    "kind",
    "series",
    "t_load_s",
)


@dataclass(slots=True)
class Script:
    """Grows while a session is written down; `history` and `steps` are what is left of it."""

    rng: np.random.Generator
    placement_share: float
    dwell_s: float = 6.0
    now_s: float = 1.0
    series: str = "1"
    mass_kg: float = 0.0  # what stands there now
    moves: list[Move] = field(default_factory=list)
    waggles: list[Waggle] = field(default_factory=list)
    gaps: list[tuple[float, float]] = field(default_factory=list)  # no readings from, to
    temperatures: list[tuple[float, float]] = field(default_factory=lambda: [(0.0, BENCH_C)])  # from when, how warm
    steps: dict[str, list[object]] = field(default_factory=lambda: {name: [] for name in COLUMNS})

    def put(self, load: Load, *, cycle: int, direction: str, kind: str = "hold", dwell_s: float | None = None) -> None:
        """Change to another load, let it stand, note the step, and reach for the next one."""
        self._move(load, down=load.mass_kg < self.mass_kg)
        loaded_s = self.moves[-1].end_s
        end_s = loaded_s + (dwell_s or self.dwell_s)
        self._note(cycle, direction, (loaded_s + SETTLE_s, end_s), load.mass_kg, kind, loaded_s)
        self.now_s = end_s + float(self.rng.uniform(0.4, 2.5))

    def zero(self, *, cycle: int) -> None:
        """Take everything off, wait, and note a zero."""
        if self.mass_kg > 0.0:
            self._move(Load(0.0, 0.0), down=True)
        loaded_s = self.moves[-1].end_s if self.moves else self.now_s
        loaded_s = max(loaded_s, self.now_s)
        end_s = loaded_s + self.dwell_s
        self._note(cycle, "zero", (loaded_s + SETTLE_s, end_s), 0.0, "hold", loaded_s)
        self.now_s = end_s + float(self.rng.uniform(0.4, 2.5))

    def whisk(self, load: Load, *, cycle: int) -> None:
        """Put a load on quickly, let it stand for a second, and snatch it off."""
        for target, lasts_s in ((load, self.rng.uniform(0.8, 1.3)), (Load(0.0, 0.0), self.rng.uniform(1.2, 2.0))):
            self._move(target, down=target.mass_kg == 0.0, quick=True)
            loaded_s = self.moves[-1].end_s
            direction = "up" if target.mass_kg else "zero"
            window = (loaded_s + 0.35, loaded_s + float(lasts_s))
            self._note(cycle, direction, window, target.mass_kg, "quick", loaded_s)
            self.now_s = window[1]
        self.now_s += float(self.rng.uniform(0.5, 1.5))

    def free(self, waggle: Waggle, *, cycle: int, kind: str) -> None:
        """Move freely on what stands there (pumping, a knock), and note when."""
        start_s = self.now_s + 0.3
        self.waggles.append(replace(waggle, start_s=start_s))
        end_s = start_s + float(waggle.t_s[-1])
        self._note(cycle, "up", (start_s - 0.25, end_s + 0.25), np.nan, kind, start_s - 0.25)
        self.now_s = end_s + float(self.rng.uniform(0.4, 0.8))

    def soak(self, lasts_s: float, temp_C: float, series: str) -> None:
        """Stop reading, bring the bench to another temperature, and start again."""
        start_s = self.now_s
        self.now_s += lasts_s
        self.gaps.append((start_s, self.now_s))
        self.temperatures.append((start_s, temp_C))
        self.series = series
        self.now_s += 1.0

    def history(self, rest_N: float) -> ForceHistory:
        """Return all that pressed, on top of what an unloaded bench does to a massless foot."""
        return ForceHistory(rest_N, tuple(self.moves), tuple(self.waggles))

    def reading_times(self, rate_Hz: float) -> FloatArray:
        """Return times of the readings: a converter 0.3 % off its rate, jittering a little, silent in the gaps."""
        period_s = 1.0 / (rate_Hz * (1.0 + 0.003 * float(self.rng.uniform(-1.0, 1.0))))
        t_s = np.arange(0.0, self.now_s, period_s)
        t_s = t_s + 0.02 * period_s * self.rng.uniform(-1.0, 1.0, t_s.size)
        for start_s, end_s in self.gaps:
            t_s = t_s[(t_s < start_s) | (t_s > end_s)]
        result: FloatArray = np.round(np.maximum(t_s - t_s[0], 0.0), 6)
        return result

    def span_of(self, kinds: Collection[str]) -> tuple[float, float]:
        """Return first start and last end of the steps of these kinds."""
        rows = [i for i, kind in enumerate(self.steps["kind"]) if kind in kinds]
        starts = [float(str(self.steps["t_start_s"][i])) for i in rows]
        ends = [float(str(self.steps["t_end_s"][i])) for i in rows]
        return min(starts), max(ends)

    def _move(self, load: Load, *, down: bool, quick: bool = False) -> None:
        felt_N = load.force_N * (1.0 + self.placement_share * float(self.rng.standard_normal()))
        self.moves.append(set_down(self.rng, self.now_s, load.force_N, felt_N, quick=quick, down=down))
        self.mass_kg = load.mass_kg

    def _note(
        self, cycle: int, direction: str, window: tuple[float, float], mass_kg: float, kind: str, loaded_s: float
    ) -> None:
        row = (
            len(self.steps["step"]) + 1,
            cycle,
            direction,
            round(window[0], 3),
            round(window[1], 3),
            mass_kg,
            np.nan,
            kind,
            self.series,
            round(loaded_s, 3),
        )
        for name, value in zip(COLUMNS, row, strict=True):
            self.steps[name].append(value)


def temperature_C(t_s: FloatArray, sets: list[tuple[float, float]], rng: np.random.Generator) -> FloatArray:
    """Return the temperature of the sensor body (n,): the last set one, wandering by 0.3 °C over some minutes."""
    starts = np.array([start for start, _ in sets])
    levels = np.array([level for _, level in sets])
    base = levels[np.maximum(np.searchsorted(starts, t_s, side="right") - 1, 0)]
    result: FloatArray = base + 0.3 * wander(t_s, np.array([120.0, 600.0]), rng)
    return result
