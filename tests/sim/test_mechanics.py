"""Tests of loop and creep joined."""

import numpy as np
import pytest

from footcal.sim.hysteresis import MaxwellSlip, Preisach
from footcal.sim.mechanics import LOADS, Mechanics, scaled, tuned
from footcal.sim.viscoelastic import KelvinChain

CHAIN = KelvinChain(np.full(8, 0.004), np.geomspace(0.01, 1e3, 8), 0.1, 0.3, 40e3)
SERIES = Mechanics(MaxwellSlip(np.array([0.02, 0.03]), np.array([0.02, 0.2]), 0.05), CHAIN, in_series=True)
PARALLEL = Mechanics(Preisach(0.1, 1.6, 0.5), CHAIN, in_series=False)


@pytest.mark.parametrize("mechanics", [SERIES, PARALLEL], ids=["series", "parallel"])
def test_tuning_reaches_the_asked_loop_and_creep(mechanics: Mechanics) -> None:
    """After tuning, both figures are the asked ones to 1 %, though each disturbs the other."""
    made = tuned(mechanics, 0.05, 0.02)
    assert (made.loop_share(), made.creep_share()) == pytest.approx((0.05, 0.02), rel=0.01)


@pytest.mark.parametrize("mechanics", [SERIES, PARALLEL], ids=["series", "parallel"])
def test_normalised_strain_is_none_at_rest_and_one_at_full_load(mechanics: Mechanics) -> None:
    """After a press: 0 without load, 1 after 10 s at full load."""
    t_s = np.cumsum([0.0, 1.0, 10.0, 1.0, 10.0, *[1.0, 10.0] * (LOADS.size - 1)])
    force = np.concatenate([[0.0, 1.0, 1.0, 0.0, 0.0], np.repeat(LOADS[1:], 2)])
    strain = mechanics.normalised().strain(t_s, force, np.full(t_s.size, 22.0))
    assert strain[[4, -1]] == pytest.approx([0.0, 1.0], abs=1e-9)


def test_without_loop_and_creep_strain_is_the_force() -> None:
    """With both scaled to nothing, the strain is the share of full load, to the last digits."""
    plain = scaled(PARALLEL, 0.0, 0.0)
    force = np.abs(np.sin(np.arange(200) * 0.1))
    strain = plain.strain(np.arange(200) * 0.1, force, np.full(200, 30.0))
    assert strain == pytest.approx(force, abs=1e-12)
    assert plain.loop_share() == pytest.approx(0.0, abs=1e-12)


def test_warm_creep_adds_to_the_span() -> None:
    """Where creep runs faster when warm, strain at full load grows with temperature; without warmth in it, it stays."""
    cold_blooded = Mechanics(PARALLEL.loop, KelvinChain(CHAIN.gains, CHAIN.taus_s, 0.0, 0.0, 0.0), in_series=False)
    assert PARALLEL.normalised().span_per_K() > 1e-5
    assert cold_blooded.normalised().span_per_K() == pytest.approx(0.0, abs=1e-12)
