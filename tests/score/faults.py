"""Faults of people and wires put into sessions: how many are named, how many good steps are set aside with them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from footcal.fit.engine import FitResult, fit_sessions
from footcal.fit.set_aside import Aside
from footcal.sim.bench import run_session
from footcal.sim.faults import Fault, injected
from footcal.sim.sensors import draw_sensor
from tests.simulated import as_session

LEAST_SHARE = 0.02  # of full scale; or five standard deviations of a placement, where that is more
PLACEMENTS = 5.0
SHARES_OF_LEAST = (0.125, 0.25, 0.5, 1.0)  # sizes of the curve, over the least that must be named
SPIKE_SHARE = 0.02  # of the range of readings: a spike smaller than this is noise
COUNTS = {"spikes": 3, "bumps": 2, "tugs": 2, "slow": 1, "wrong_masses": 2}
NAMES = ("spike", "bump", "tug", "slow", "wrong_mass")


@dataclass(frozen=True)
class FaultScore:
    """What one faulty session showed."""

    named: dict[str, tuple[int, int]]  # by kind of fault: named, injected
    false: int  # good steps set aside
    good: int  # good steps
    wrongly_named: tuple[str, ...]  # those faults that were set aside with a mass that is not the true one

    def share(self) -> tuple[int, int]:
        """Return how many bumps, tugs and wrong masses were named, of how many."""
        pairs = [self.named[name] for name in ("bump", "tug", "wrong_mass")]
        return sum(pair[0] for pair in pairs), sum(pair[1] for pair in pairs)


def score_faults(kind: str, seed: int, share_of_least: float = 1.0) -> FaultScore:
    """Fit one whole session with faults of 1 to 2 times `share_of_least` of the least that must be named."""
    rng = np.random.default_rng(seed)
    sensor = draw_sensor(kind, rng)
    least = max(LEAST_SHARE, PLACEMENTS * sensor.placement_share)
    faulty, faults = injected(run_session(sensor, rng), sensor, rng, size_share=share_of_least * least, **COUNTS)
    result = fit_sessions([as_session(faulty)])
    return judged(result, faults)


def judged(result: FitResult, faults: Sequence[Fault]) -> FaultScore:
    """Compare what was set aside with what was done."""
    data = result.data
    asides = {data.holds[aside.hold].step: aside for aside in result.asides}
    true_kg = {hold.step: hold.mass_kg for hold in data.holds}
    named = dict.fromkeys(NAMES, (0, 0))
    wrong = []
    for fault in faults:
        if fault.kind == "spike":
            if abs(fault.size) < SPIKE_SHARE * float(np.ptp(np.quantile(data.channel.raw, (0.001, 0.999)))):
                continue
            found = any(abs(t_s - fault.t_s) < 1e-5 for _, t_s in data.channel.spikes_s)
        else:
            found = fault.step in asides
        if fault.kind == "wrong_mass" and found and not _mass_named(fault, asides[fault.step], true_kg):
            wrong.append(asides[fault.step].reason)
        hit, of = named[fault.kind]
        named[fault.kind] = (hit + found, of + 1)
    bad = {fault.step for fault in faults}
    good = [hold.step for hold in data.holds if hold.step not in bad]
    return FaultScore(named, sum(step in asides for step in good), len(good), tuple(wrong))


def _mass_named(fault: Fault, aside: Aside, entered_kg: dict[int, float]) -> bool:
    """Whether the mass said to fit is nearer the true one than a third of the slip."""
    right_kg = entered_kg[fault.step] - fault.size
    return aside.fits_kg is not None and abs(aside.fits_kg - right_kg) < abs(fault.size) / 3.0


def summed(scores: Sequence[FaultScore]) -> FaultScore:
    """Return several sessions as one."""
    named = {
        name: (sum(one.named[name][0] for one in scores), sum(one.named[name][1] for one in scores)) for name in NAMES
    }
    wrong = tuple(reason for one in scores for reason in one.wrongly_named)
    return FaultScore(named, sum(one.false for one in scores), sum(one.good for one in scores), wrong)
