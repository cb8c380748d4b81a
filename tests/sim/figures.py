"""Figures of a simulated sensor, measured from its counts alone as a test house would: the tests' own protocol."""

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import PchipInterpolator

from footcal.records import FloatArray
from footcal.sim.sensors import SimulatedSensor

LOADS = np.linspace(0.0, 1.0, 21)
RATE_Hz = 50.0


@dataclass(frozen=True)
class Figures:
    """In % of full scale (loop, creep, span: referred to the force; the rest: to the output)."""

    loop_pct: float
    nonlinearity_pct: float
    creep_pct: float
    span_pct_per_K: float
    zero_pct_per_K: float
    noise_pct: float


def measured(sensor: SimulatedSensor, rng: np.random.Generator) -> Figures:
    """Return the realised figures of one sensor."""
    up, down = stepped_cycle(sensor, 22.0, rng)
    output = up[-1] - up[0]
    loading = LoadingCurve(up)
    middle = 0.5 * (up + down)
    line = middle[0] + (middle[-1] - middle[0]) * LOADS
    hot, cold = (stepped_cycle(sensor, temp_C, rng)[0] for temp_C in (38.0, 8.0))
    plain = [linear_enough(sensor, counts) for counts in (up, hot, cold)]
    # A change of span moves the load axis: the load at which 22 °C gives the same rise from zero, near 0.8.
    at = int(np.argmin(np.abs(LOADS - 0.8)))
    bench = LoadingCurve(plain[0])
    seen = [bench.load(plain[0][0] + warm[at] - warm[0]) for warm in plain[1:]]
    return Figures(
        loop_pct=100.0 * max(loading.load(raw) - load for raw, load in zip(down, LOADS, strict=True) if load > 0.02),
        nonlinearity_pct=100.0 * float(np.max(np.abs(middle - line)) / abs(output)),
        creep_pct=100.0 * creep_share(sensor, loading, rng),
        span_pct_per_K=100.0 * (seen[0] - seen[1]) / 30.0 / 0.8,
        zero_pct_per_K=100.0 * (hot[0] - cold[0]) / 30.0 / output,
        noise_pct=100.0 * noise_share(sensor, output, rng),
    )


class LoadingCurve:
    """Counts on the way up, turned into load; beyond the last load along the last two."""

    def __init__(self, up: FloatArray) -> None:
        self.sign = np.sign(up[-1] - up[0])
        self.counts = self.sign * up
        self.inside = PchipInterpolator(self.counts, LOADS)

    def load(self, raw: float) -> float:
        """Return the load (share of full scale) at which the way up gives these counts."""
        counts = self.sign * raw
        if counts <= self.counts[-1]:
            return float(self.inside(counts))
        slope = (LOADS[-1] - LOADS[-3]) / (self.counts[-1] - self.counts[-3])
        return float(LOADS[-1] + slope * (counts - self.counts[-1]))


def linear_enough(sensor: SimulatedSensor, raw: FloatArray) -> FloatArray:
    """Return counts; a divider's as conductance, for its zero moves by a leak beside the pad."""
    if sensor.sheet.transducer != "resistive":
        return raw
    return (sensor.raw_max - raw) / raw if sensor.pad_to_ground else raw / (sensor.raw_max - raw)


def stepped_cycle(sensor: SimulatedSensor, temp_C: float, rng: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Return mean counts at the end of each 10 s dwell on the way up and on the way down, each in rising order."""
    loads = np.concatenate([[0.0, 1.0], LOADS, LOADS[-2::-1]])  # one press first, as everybody does
    t_s = np.arange(0.0, 11.0 * loads.size, 1.0 / RATE_Hz)
    place = np.minimum((t_s // 11.0).astype(int), loads.size - 1)
    into_s = t_s - 11.0 * place
    before = loads[np.maximum(place - 1, 0)]
    force = before + (loads[place] - before) * np.clip(into_s, 0.0, 1.0)
    raw = sensor.respond(t_s, force * sensor.capacity_N, temp_C, rng)
    means = np.array([raw[(place == k) & (into_s > 9.5)].mean() for k in range(loads.size)])
    counted = means[2:]
    return counted[: LOADS.size], counted[LOADS.size - 1 :][::-1]


def creep_share(sensor: SimulatedSensor, loading: LoadingCurve, rng: np.random.Generator) -> float:
    """Return what the reading gains from 1 s to 60 s after full load, referred to the force by the rising curve."""
    t_s = np.arange(-5.0, 66.0, 1.0 / RATE_Hz)
    force_N = sensor.capacity_N * np.clip(t_s / 0.1, 0.0, 1.0)
    raw = np.mean([sensor.respond(t_s, force_N, 22.0, rng) for _ in range(16)], axis=0)  # A's noise is near its creep
    early = raw[(t_s > 1.0) & (t_s < 1.2)].mean()
    late = raw[(t_s > 59.0) & (t_s < 61.0)].mean()
    return loading.load(late) - loading.load(early)


def noise_share(sensor: SimulatedSensor, output: float, rng: np.random.Generator) -> float:
    """Return rms of the unloaded reading at 1 kHz over a minute, as a share of full output."""
    t_s = np.arange(0.0, 60.0, 1e-3)
    raw = sensor.on_channel(1000.0).respond(t_s, np.zeros(t_s.size), 22.0, rng)
    return float(raw.std() / abs(output))
