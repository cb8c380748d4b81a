"""How a person loads a bench: set-down with its ringing, pauses, pumping, knocks. Force against time, exactly."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.records import FloatArray

FINE_s: Final = 2e-3  # grid on which moving loads are followed
AFTER_s: Final = 1.5  # ringing has gone so long after a move


@dataclass(frozen=True, slots=True)
class Move:
    """The force goes from where it was to `to_N`, along a smooth S, and rings when it gets there."""

    start_s: float
    lasts_s: float
    to_N: float  # what really presses
    to_sensed_N: float  # what this placement makes the sensor feel
    ring_share: float  # of the change
    ring_Hz: float
    ring_decay_s: float

    @property
    def end_s(self) -> float:
        """When the load has stopped moving."""
        return self.start_s + self.lasts_s


@dataclass(frozen=True, slots=True)
class Waggle:
    """A stretch of free movement (pump, knock, bump), added to the load that stands there: shape by its own samples."""

    start_s: float
    t_s: FloatArray  # (m,) from start, rising, first 0
    added_N: FloatArray  # (m,) 0 at both ends
    felt_only: bool = False  # True: the sensor's cable or housing is disturbed, the load is not


@dataclass(frozen=True, slots=True)
class ForceHistory:
    """All that pressed on the sensor in a session."""

    rest_N: float  # unloaded bench, seen by a massless foot
    moves: tuple[Move, ...]  # in order of time
    waggles: tuple[Waggle, ...]

    def force_N(self, t_s: FloatArray, *, sensed: bool) -> FloatArray:
        """Return the force at times of any order, (n,): the real one, or the one the sensor feels in its placement."""
        order = np.argsort(t_s, kind="stable")
        t = t_s[order]
        total = np.zeros(t.size)
        level = 0.0
        for move in self.moves:
            target = move.to_sensed_N if sensed else move.to_N
            change, level = target - level, target
            first, settled = np.searchsorted(t, [move.start_s, move.end_s + AFTER_s])
            total[settled:] += change
            total[first:settled] += change * _set_down(t[first:settled] - move.start_s, move)
        for waggle in self.waggles:
            if sensed or not waggle.felt_only:
                total += np.interp(t - waggle.start_s, waggle.t_s, waggle.added_N, left=0.0, right=0.0)
        out = np.empty(t.size)
        out[order] = total + self.rest_N
        return out

    def fine_times(self, t_s: FloatArray) -> FloatArray:
        """Return the reading times and, where something moves, a grid of 2 ms between them."""
        spans = [(m.start_s, m.end_s + AFTER_s) for m in self.moves]
        spans += [(w.start_s, w.start_s + float(w.t_s[-1]) + 0.1) for w in self.waggles]
        parts = [t_s] + [np.arange(a, b, FINE_s) for a, b in spans if b > t_s[0] and a < t_s[-1]]
        both = np.unique(np.concatenate(parts))
        both = both[(both >= t_s[0]) & (both <= t_s[-1])]
        keep = np.concatenate([[True], np.diff(both) > 1e-7]) | np.isin(both, t_s)
        result: FloatArray = both[keep]
        return result


def _set_down(since_s: FloatArray, move: Move) -> FloatArray:
    """Share of the change that has arrived; a smooth S, and from seven tenths of it on a fading swing."""
    x = np.clip(since_s / move.lasts_s, 0.0, 1.0)
    smooth = x**3 * (10.0 - 15.0 * x + 6.0 * x * x)
    after = since_s - 0.7 * move.lasts_s
    end = 0.3 * move.lasts_s + AFTER_s
    fade = np.exp(-np.maximum(after, 0.0) / move.ring_decay_s) * np.clip(10.0 * (1.0 - after / end), 0.0, 1.0)
    swing = move.ring_share * np.sin(2.0 * np.pi * move.ring_Hz * np.maximum(after, 0.0)) * fade
    result: FloatArray = smooth + swing
    return result


def set_down(
    rng: np.random.Generator,
    start_s: float,
    to_N: float,
    to_sensed_N: float,
    *,
    quick: bool = False,
    down: bool = False,
) -> Move:
    """Return a move as a person makes it: 0.3 to 1 s (whisked: 0.12 to 0.3 s), ringing at 4 to 9 Hz."""
    return Move(
        start_s=start_s,
        lasts_s=float(rng.uniform(0.12, 0.3) if quick else rng.uniform(0.3, 1.0)),
        to_N=to_N,
        to_sensed_N=to_sensed_N,
        ring_share=float(rng.uniform(0.01, 0.03) if down else rng.uniform(0.03, 0.1)),
        ring_Hz=float(rng.uniform(4.0, 9.0)),
        ring_decay_s=float(rng.uniform(0.08, 0.2)),
    )


def pumping(rng: np.random.Generator, lasts_s: float, full_N: float) -> Waggle:
    """Return pumping by hand: strokes of 0.3 to 1.4 s, peaks 30 to 90 % of full scale, not always let go fully."""
    t_s = np.arange(0.0, lasts_s, FINE_s)
    added = np.zeros(t_s.size)
    now, low = 0.3, 0.0
    while now < lasts_s - 3.0:
        rise, fall = rng.uniform(0.3, 1.4, 2) / 2.0
        peak = full_N * rng.uniform(0.3, 0.9)
        floor = full_N * (rng.uniform(0.1, 0.25) if rng.random() < 0.25 else rng.uniform(0.0, 0.03))
        up = (t_s >= now) & (t_s < now + rise)
        down = (t_s >= now + rise) & (t_s < now + rise + fall)
        added[up] = low + (peak - low) * 0.5 * (1.0 - np.cos(np.pi * (t_s[up] - now) / rise))
        added[down] = floor + (peak - floor) * 0.5 * (1.0 + np.cos(np.pi * (t_s[down] - now - rise) / fall))
        now, low = now + rise + fall, floor
    tail = t_s >= now
    added[tail] = low * np.exp(-(t_s[tail] - now) / 0.2)
    added *= np.clip((lasts_s - FINE_s - t_s) / 0.2, 0.0, 1.0)
    return Waggle(0.0, t_s, added)


def knock(rng: np.random.Generator, start_s: float, full_N: float) -> Waggle:
    """Return one sharp knock on the pan: half a sine of 20 to 40 ms, 20 to 40 % of full scale."""
    lasts_s = rng.uniform(0.02, 0.04)
    t_s = np.linspace(0.0, lasts_s, 21)
    return Waggle(start_s, t_s, full_N * rng.uniform(0.2, 0.4) * np.sin(np.pi * t_s / lasts_s))
