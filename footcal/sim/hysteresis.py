"""Rate-independent loops of simulated sensors: Preisach relays; Maxwell-slip elements with load-dependent limits.

Both are forward laws (force in, strain out), worked in shares of full scale. Sources: F. Preisach, Z. Phys. 94 (1935)
277, in the Everett form of I. D. Mayergoyz, "Mathematical Models of Hysteresis"; W. D. Iwan, J. Appl. Mech. 33 (1966)
893 for elements that stick and slip (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numba import njit

from footcal.records import FloatArray

LOWEST: Final = -0.3  # share of full scale below which every relay is off
STACK: Final = 512  # turning points remembered; deeper nesting closes the innermost loop


@dataclass(frozen=True, slots=True)
class Preisach:
    """A field of relays, described by how many of them switch between two loads.

    The share that switches on a rise from b to a is E(a, b) = ((a - b)/1)^width_power * (((a + b)/2 + base) /
    (1/2 + base))^load_power, so that E(1, 0) = 1. Its relay density is nowhere negative while width_power > 1 and
    0 <= load_power <= 1; with load_power above 0 the field is wider at high load.
    """

    share: float  # part of the strain that goes through the relays; sets the loop's size
    width_power: float
    load_power: float
    base: float = 0.35

    def stronger(self, factor: float) -> Preisach:
        """Return the same field with a loop that many times as wide."""
        return replace(self, share=self.share * factor)

    def strain(self, force: FloatArray) -> FloatArray:
        """Return the strain for a force history that follows a full press and release; (n,), shares of full scale."""
        on = _relays_on(force, self.width_power, self.load_power, self.base)
        result: FloatArray = force + self.share * (on - force)
        return result


@dataclass(frozen=True, slots=True)
class MaxwellSlip:
    """Elements in parallel with the pad's own spring that stick, then slip at a limit which grows with the load.

    Balance: force = strain + sum of element forces; an element carries at most limit * (base + strain).
    """

    limits: FloatArray  # (m,) slip limit per unit of load
    reach: FloatArray  # (m,) strain at which an element slips when the load is full
    base: float  # load-free part of the limit: what an unloaded pad still holds back

    def stronger(self, factor: float) -> MaxwellSlip:
        """Return the same elements with limits that many times as high."""
        return replace(self, limits=self.limits * factor)

    def strain(self, force: FloatArray) -> FloatArray:
        """Return the strain for a force history that follows a full press and release; (n,), shares of full scale."""
        before = np.concatenate([np.linspace(0.0, 1.0, 20), np.linspace(1.0, force[0], 20)])
        both = _slip(np.concatenate([before, force]), self.limits, self.reach, self.base)
        result: FloatArray = both[before.size :]
        return result


@njit(cache=True)
def _everett(a: float, b: float, width_power: float, load_power: float, base: float) -> float:
    if a <= b:
        return 0.0
    mean = max(0.5 * (a + b) + base, 1e-3) / (0.5 + base)
    return float((a - b) ** width_power * mean**load_power)


@njit(cache=True)
def _relays_on(force: FloatArray, width_power: float, load_power: float, base: float) -> FloatArray:
    """Share of relays that are on, by the stack of turning points (wiping-out: an outer extreme deletes inner ones)."""
    turn = np.empty(STACK)  # minima at even places, maxima at odd ones
    on = np.empty(STACK)  # share that is on at each turning point
    turn[0], on[0] = LOWEST, 0.0
    turn[1] = 1.0
    on[1] = _everett(1.0, LOWEST, width_power, load_power, base)
    top = 1  # last turning point; the branch leaves from here
    last = 1.0
    out = np.empty(force.size)
    for i in range(force.size):
        now = max(force[i], LOWEST)
        rising = top % 2 == 0
        if (rising and now < last) or (not rising and now > last):
            turn[top + 1], on[top + 1] = last, out[i - 1] if i > 0 else on[top]
            top += 1
            rising = not rising
        while top >= 2 and ((rising and now >= turn[top - 1]) or (not rising and now <= turn[top - 1])):
            top -= 2
        if top >= STACK - 3:
            top -= 2
        if top % 2 == 0:
            out[i] = on[top] + _everett(now, turn[top], width_power, load_power, base)
        else:
            out[i] = on[top] - _everett(turn[top], now, width_power, load_power, base)
        last = now
    return out


@njit(cache=True)
def _slip(force: FloatArray, limits: FloatArray, reach: FloatArray, base: float) -> FloatArray:
    """Strain of spring and slip elements under a given force, by Newton steps kept inside a shrinking bracket."""
    count = limits.size
    stiff = limits * (base + 1.0) / reach
    held = np.zeros(count)
    out = np.empty(force.size)
    x = 0.0
    for i in range(force.size):
        start = x
        low, high = -10.0, 10.0
        for _ in range(60):
            value, slope = x - force[i], 1.0
            for k in range(count):
                limit = limits[k] * (base + max(x, 0.0))
                q = held[k] + stiff[k] * (x - start)
                if q > limit:
                    value += limit
                    slope += limits[k] if x > 0.0 else 0.0
                elif q < -limit:
                    value -= limit
                    slope -= limits[k] if x > 0.0 else 0.0
                else:
                    value += q
                    slope += stiff[k]
            if abs(value) < 1e-13:
                break
            if value > 0.0:
                high = x
            else:
                low = x
            x -= value / slope
            if not low < x < high:
                x = 0.5 * (low + high)
        for k in range(count):
            limit = limits[k] * (base + max(x, 0.0))
            held[k] = min(max(held[k] + stiff[k] * (x - start), -limit), limit)
        out[i] = x
    return out
