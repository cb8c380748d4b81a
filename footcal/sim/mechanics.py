"""The mechanical half of a simulated sensor, force to strain: hysteresis and creep, in a row or side by side."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.hysteresis import MaxwellSlip, Preisach
from footcal.sim.viscoelastic import KelvinChain

BENCH_C: Final = 22.0
STEPS: Final = 20  # loads of the probing cycle
LOADS: Final = np.linspace(0.0, 1.0, STEPS + 1)
MOVE_s: Final = 1.0
DWELL_s: Final = 10.0


@dataclass(frozen=True, slots=True)
class Mechanics:
    """Hysteresis and creep; strain 0 for the settled unloaded sensor, 1 after 10 s at full load."""

    loop: Preisach | MaxwellSlip
    chain: KelvinChain
    in_series: bool  # creep sees the force behind the friction (pads), or the force itself (metal and its glue)
    zero: float = 0.0
    full: float = 1.0

    def strain(self, t_s: FloatArray, force: FloatArray, temp_C: FloatArray, before_s: float = 20.0) -> FloatArray:
        """Return strain for a force history (n,) in shares of full scale, the element being at `temp_C` (n,)."""
        held = self.loop.strain(force)
        crept = self.chain.strain(t_s, held if self.in_series else force, temp_C, before_s)
        result: FloatArray = (held + crept - self.zero) / (self.full - self.zero)
        return result

    def normalised(self) -> Mechanics:
        """Return the same mechanics with strain 0 and 1 where they belong."""
        loaded = _cycle(replace(self, zero=0.0, full=1.0), BENCH_C)
        return replace(self, zero=float(loaded[0]), full=float(loaded[STEPS]))

    def loop_share(self) -> float:
        """Return by how much more load the same strain asks on the way up than on the way down; steps of 10 s dwell."""
        loaded = _cycle(self, BENCH_C)
        up, down = loaded[: STEPS + 1], loaded[STEPS:][::-1]
        return float(np.max(np.interp(down[1:], up, LOADS) - LOADS[1:]))

    def creep_share(self) -> float:
        """Return what the reading gains from 1 s to 60 s after full load, by the slope of the loading curve there."""
        t_s = np.array([0.0, 0.1, 1.1, 60.1])
        strain = self.strain(t_s, np.array([0.0, 1.0, 1.0, 1.0]), np.full(4, BENCH_C))
        up = _cycle(self, BENCH_C)[: STEPS + 1]
        return float((strain[3] - strain[2]) * (LOADS[-1] - LOADS[-2]) / (up[-1] - up[-2]))

    def middle(self) -> FloatArray:
        """Return the mean strain of loading and unloading at each of `LOADS`."""
        loaded = _cycle(self, BENCH_C)
        result: FloatArray = 0.5 * (loaded[: STEPS + 1] + loaded[STEPS:][::-1])
        return result

    def span_per_K(self) -> float:
        """Return how much of the strain at full load comes with each degree by faster creep alone, 8 to 38 °C."""
        full = [_cycle(self, temp_C)[[0, STEPS]] for temp_C in (8.0, 38.0)]
        return float((full[1][1] - full[1][0] - full[0][1] + full[0][0]) / 30.0)


def _cycle(mechanics: Mechanics, temp_C: float) -> FloatArray:
    """Strain at the end of each dwell of one cycle, zero to full to zero, after a press; (2 * STEPS + 1,)."""
    loads = np.concatenate([LOADS, LOADS[-2::-1]])
    force = np.concatenate([[0.0, 1.0, 1.0], np.repeat(loads, 2)])
    step = np.concatenate([[0.0, MOVE_s, DWELL_s], np.tile([MOVE_s, DWELL_s], loads.size)])
    result: FloatArray = mechanics.strain(np.cumsum(step), force, np.full(force.size, temp_C))[4::2]
    return result


def scaled(mechanics: Mechanics, loop: float, creep: float) -> Mechanics:
    """Return the mechanics with loop and creep that many times as strong, strain normalised again."""
    chain = replace(mechanics.chain, gains=mechanics.chain.gains * creep)
    return replace(mechanics, loop=mechanics.loop.stronger(loop), chain=chain).normalised()


def tuned(mechanics: Mechanics, loop_share: float, creep_share: float) -> Mechanics:
    """Return the mechanics with these realised figures, by repeated proportional correction."""
    now = mechanics.normalised()
    for _ in range(12):
        # Creep adds to the stepped loop, so relays and sliders carry only what is left.
        loop = np.clip(loop_share / now.loop_share(), 0.5, 2.0)
        creep = np.clip(creep_share / now.creep_share(), 0.2, 5.0)
        now = scaled(now, float(loop), float(creep))
    return now
