"""Tests of the simulated creep, against closed forms."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from footcal.sim.viscoelastic import KelvinChain
from tests.reference.tables import rows


def chain(**changes: float) -> KelvinChain:
    """Return two plain elements."""
    plain = {"stiffening": 0.0, "eyring": 0.0, "activation_J_per_mol": 0.0}
    return KelvinChain(gains=np.array([0.02, 0.05]), taus_s=np.array([0.5, 20.0]), **(plain | changes))


def test_one_element_beside_a_spring_is_the_standard_linear_solid() -> None:
    """A step of stress 12 on E∞ = 100, E1 = 50, η = 500 strains as the textbook's closed form (creep_sls.csv)."""
    table = rows("creep_sls.csv")
    t_s = np.array([float(row["t"]) for row in table])
    grid_s = np.concatenate([[-1e-9], t_s])
    drive = np.where(grid_s < 0.0, 0.0, 1.0)
    drive[1] = 1.0
    solid = KelvinChain(np.array([1.0 / 100.0 - 1.0 / 150.0]), np.array([15.0]), 0.0, 0.0, 0.0)
    strain = 12.0 * (drive / 150.0 + solid.strain(grid_s, drive, np.full(grid_s.size, 22.0), before_s=0.0))
    assert strain[1:] == pytest.approx([float(row["creep_strain"]) for row in table], abs=1e-9)


def test_a_ramp_is_followed_exactly_on_any_grid() -> None:
    """Under a straight ramp, one long interval and a thousand short ones end at the same strain."""
    coarse, fine = np.array([0.0, 10.0]), np.linspace(0.0, 10.0, 1001)
    once = chain().strain(coarse, coarse / 10.0, np.full(2, 22.0), 0.0)[-1]
    often = chain().strain(fine, fine / 10.0, np.full(fine.size, 22.0), 0.0)[-1]
    assert once == pytest.approx(often, rel=1e-10)


def test_load_and_temperature_enter_as_the_equation_says() -> None:
    """With stiffening, stress-aided speed and warmth, the chain agrees with a general ODE solver to 1e-4."""
    law = chain(stiffening=0.2, eyring=0.5, activation_J_per_mol=50e3)
    t_s = np.linspace(0.0, 30.0, 3001)
    drive, temp_C = np.sin(t_s / 4.0) ** 2, 22.0 + 0.5 * t_s
    strain = law.strain(t_s, drive, temp_C, 0.0)

    def rate(t: float, e: np.ndarray) -> np.ndarray:
        s, kelvin = np.sin(t / 4.0) ** 2, 22.0 + 0.5 * t + 273.15
        speed = np.exp(-50e3 / 8.314462618 * (1.0 / kelvin - 1.0 / 295.15) + 0.5 * s)
        return speed * (law.gains * s * (1.0 + 0.2 * s) - e) / law.taus_s

    solved = solve_ivp(rate, (0.0, 30.0), np.zeros(2), rtol=1e-9, atol=1e-12)
    assert strain[-1] == pytest.approx(solved.y[:, -1].sum(), rel=1e-4)


def test_creep_runs_some_twice_as_fast_ten_degrees_warmer() -> None:
    """Arrhenius with 50 kJ/mol: from 22 to 32 °C the speed grows by exp(0.6680) = 1.950 (by hand)."""
    factor = chain(activation_J_per_mol=50e3).speed(np.array([32.0]))
    assert factor == pytest.approx([1.950], abs=2e-3)


def test_a_long_stand_is_remembered() -> None:
    """A load that has stood for ten times the longest time constant creeps no more."""
    strain = chain().strain(np.array([0.0, 100.0]), np.array([1.0, 1.0]), np.full(2, 22.0), before_s=200.0)
    assert strain == pytest.approx([0.07, 0.07], abs=1e-5)  # 0.02 + 0.05, less exp(−10) of it
