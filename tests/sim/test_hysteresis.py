"""Tests of the simulated loops, against the properties their laws are known for."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from footcal.records import FloatArray
from footcal.sim.hysteresis import MaxwellSlip, Preisach

RELAYS = Preisach(share=1.0, width_power=1.6, load_power=0.5)
SLIDERS = MaxwellSlip(limits=np.array([0.02, 0.03, 0.01]), reach=np.array([0.02, 0.1, 0.3]), base=0.05)


def path(*turns: float, steps: int = 40) -> FloatArray:
    """Return a force history through these turning points."""
    parts = [np.linspace(a, b, steps + 1)[1:] for a, b in pairwise(turns)]
    return np.concatenate([[turns[0]], *parts])


def counted_relays(force: FloatArray, relays: Preisach, cells: int = 220) -> FloatArray:
    """Switch a grid of relays one by one: the definition, without turning points or closed form.

    Weights come from differences of the share that switches on between two loads, which fixes the density.
    """
    edges = np.linspace(-0.3, 1.0, cells + 1)
    up, low = np.meshgrid(edges, edges, indexing="ij")
    mean = np.maximum(0.5 * (up + low) + relays.base, 1e-3) / (0.5 + relays.base)
    share = np.where(up > low, np.maximum(up - low, 0.0) ** relays.width_power * mean**relays.load_power, 0.0)
    weight = share[1:, :-1] - share[1:, 1:] - share[:-1, :-1] + share[:-1, 1:]
    centre = 0.5 * (edges[1:] + edges[:-1])
    alpha, beta = np.meshgrid(centre, centre, indexing="ij")
    on = np.zeros_like(alpha, dtype=bool)
    out = []
    for now in np.concatenate([[1.0], force]):  # a full press first
        on = np.where(now >= alpha, True, np.where(now <= beta, False, on))  # noqa: FBT003  (the state of a relay)
        out.append(np.sum(weight[on & (alpha >= beta)]))
    return np.array(out[1:])


def test_relays_agree_with_switching_them_one_by_one() -> None:
    """The closed form with turning points equals some 24 000 relays switched by hand, to the width of a cell."""
    force = path(0.0, 0.8, 0.2, 0.6, 0.35, 0.9, 0.0, steps=25)
    expected = counted_relays(force, RELAYS)
    assert np.max(np.abs(RELAYS.strain(force) - expected)) < 0.012  # a cell is 1.3 / 220 wide


def test_an_outer_turn_wipes_out_inner_ones() -> None:
    """After a larger swing the strain no longer tells of smaller ones before it (wiping-out)."""
    plain = RELAYS.strain(path(0.0, 0.9, 0.1))[-1]
    wiggled = RELAYS.strain(path(0.0, 0.4, 0.3, 0.6, 0.2, 0.5, 0.9, 0.3, 0.5, 0.1))[-1]
    assert wiggled == pytest.approx(plain, abs=1e-12)


def test_loops_between_the_same_loads_are_congruent() -> None:
    """Two minor loops between the same loads have the same height, wherever they started (congruency)."""
    first = RELAYS.strain(path(0.0, 0.3, 0.6, 0.3))
    second = RELAYS.strain(path(0.0, 1.0, 0.3, 0.6, 0.3))
    assert first[80] - first[120] == pytest.approx(second[120] - second[160], abs=1e-12)


@given(st.lists(st.floats(-0.1, 1.2), min_size=2, max_size=40))
@settings(max_examples=60, deadline=None)
def test_relays_never_move_against_the_force(turns: list[float]) -> None:
    """Strain rises while force rises and falls while it falls: no relay has a negative weight."""
    force = path(*turns, steps=5)
    moved = np.diff(RELAYS.strain(force)) * np.sign(np.diff(force))
    assert moved.min() >= -1e-12


@pytest.mark.parametrize("law", [Preisach(0.2, 1.6, 0.5), SLIDERS])
def test_unloading_reads_more_than_loading(law: Preisach | MaxwellSlip) -> None:
    """At every load between the ends, the way down lies above the way up: the loop takes up energy."""
    strain = law.strain(path(0.0, 1.0, 0.0))
    assert (strain[41:-1][::-1] > strain[1:40]).all()


def test_a_single_slider_gives_the_loop_of_coulomb_friction() -> None:
    """One slider that slips at once: force = strain ± limit·(base + strain), so the two ways are known by hand."""
    law = MaxwellSlip(limits=np.array([0.1]), reach=np.array([1e-4]), base=0.2)
    force = path(0.0, 1.0, 0.0, steps=100)
    strain = law.strain(force)
    up, down = strain[60], strain[140]  # both at 0.6
    assert up == pytest.approx((0.6 - 0.1 * 0.2) / 1.1, abs=1e-4)
    assert down == pytest.approx((0.6 + 0.1 * 0.2) / 0.9, abs=1e-4)


@given(st.lists(st.floats(0.0, 1.2), min_size=2, max_size=30))
@settings(max_examples=60, deadline=None)
def test_sliders_stay_in_balance(turns: list[float]) -> None:
    """What the sliders carry is never more than their limits allow: |force − strain| ≤ Σ limits·(base + strain)."""
    force = path(*turns, steps=7)
    strain = SLIDERS.strain(force)
    allowed = SLIDERS.limits.sum() * (SLIDERS.base + np.maximum(strain, 0.0))
    assert (np.abs(force - strain) <= allowed + 1e-9).all()


def test_slider_loops_are_wider_at_high_load() -> None:
    """Limits grow with the load: where the sliders slip at once, the loop at 0.8 is 3.4 times as wide as at 0.2.

    By hand: width = 2·limit·(base + strain), so (0.05 + 0.8) / (0.05 + 0.2), strain being nearly the force.
    """
    strain = MaxwellSlip(limits=np.array([0.01]), reach=np.array([1e-3]), base=0.05).strain(path(0.0, 1.0, 0.0))
    assert (strain[48] - strain[32]) / (strain[72] - strain[8]) == pytest.approx(0.85 / 0.25, rel=0.01)


def test_sliders_stick_in_a_small_swing() -> None:
    """Turning back by less than any slider's reach, the strain follows one line, by the sum of all stiffnesses."""
    strain = SLIDERS.strain(path(0.0, 0.8, 0.795, 0.7975, steps=50))
    stiffness = np.sum(SLIDERS.limits * (SLIDERS.base + 1.0) / SLIDERS.reach)
    assert strain[50] - strain[100] == pytest.approx(0.005 / (1.0 + stiffness), rel=1e-6)
    assert strain[150] - strain[100] == pytest.approx(0.0025 / (1.0 + stiffness), rel=1e-6)
