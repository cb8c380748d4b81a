"""The mechanical half of a simulated sensor, force to strain: hysteresis and creep, in a row or side by side."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from footcal.records import FloatArray
from footcal.sim.hysteresis import MaxwellSlip, Preisach
from footcal.sim.viscoelastic import KelvinChain

BENCH_C: Final = 22.0
STEPS: Final = 10  # loads of the probing cycle
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
        plain = replace(self, zero=0.0, full=1.0)
        loaded = _cycle(plain)
        return replace(self, zero=float(loaded[0]), full=float(loaded[STEPS]))

    def loop_share(self) -> float:
        """Return the largest difference of unloading and loading in a stepped cycle of 10 s dwell."""
        loaded = _cycle(self)
        return float(np.max(np.abs(loaded[STEPS:][::-1] - loaded[: STEPS + 1])))

    def creep_share(self) -> float:
        """Return what strain gains from 1 s to 60 s after full load."""
        t_s = np.array([0.0, 0.1, 1.1, 60.1])
        strain = self.strain(t_s, np.array([0.0, 1.0, 1.0, 1.0]), np.full(4, BENCH_C))
        return float(strain[3] - strain[2])


def _cycle(mechanics: Mechanics) -> FloatArray:
    """Strain at the end of each dwell of one cycle, zero to full to zero, after a press; (2 * STEPS + 1,)."""
    loads = np.concatenate([np.linspace(0.0, 1.0, STEPS + 1), np.linspace(1.0, 0.0, STEPS + 1)[1:]])
    force = np.concatenate([[0.0, 1.0, 1.0], np.repeat(loads, 2)])
    step = np.concatenate([[0.0, MOVE_s, DWELL_s], np.tile([MOVE_s, DWELL_s], loads.size)])
    temp_C = np.full(force.size, BENCH_C)
    result: FloatArray = mechanics.strain(np.cumsum(step), force, temp_C)[4::2]
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
