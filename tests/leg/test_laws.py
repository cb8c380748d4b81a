"""Small laws of motors, screws, friction and what a current can show, against handbook cases typed in here."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from footcal.errors import SettingError
from footcal.leg.drive import JointDrive, joint_drive
from footcal.leg.friction import friction_Nm
from footcal.leg.motor import torque_constant_Nm_per_A
from footcal.leg.observable import backward_efficiency, load_efficiencies, observable_by_posture, observable_share
from footcal.leg.schema import Joint
from footcal.leg.screw import Screw


def drive(**changes: float) -> JointDrive:
    """A drive without friction, changed as told."""
    plain = joint_drive(Joint(name="j", axis=(0.0, 1.0, 0.0), xyz_m=(0.0, 0.0, 0.0)))
    return type(plain)(**{name: changes.get(name, getattr(plain, name)) for name in plain.__slots__})


@pytest.mark.parametrize(
    ("kv_rpm_per_V", "kt_Nm_per_A"), [(60, 0.159154943), (100, 0.095492966), (190, 0.050259456), (380, 0.025129728)]
)
def test_torque_constant_is_the_inverse_of_the_speed_constant(kv_rpm_per_V: float, kt_Nm_per_A: float) -> None:
    """Kt = 60 / (2 pi Kv)."""
    # Reference: identity of units, computed apart to 9 decimals.
    assert torque_constant_Nm_per_A(kv_rpm_per_V) == pytest.approx(kt_Nm_per_A, abs=1e-9)


def test_speed_constant_of_zero_is_refused() -> None:
    """No motor has it."""
    with pytest.raises(SettingError, match="must be above 0"):
        torque_constant_Nm_per_A(0.0)


SCREWS = [  # mean diameter, lead, friction, half angle, then computed apart: lead angle, forward, back, self-locking
    (0.010, 0.002, 0.12, 0.0, 3.6426, 0.34398, -0.87825, True),  # square thread, low lead
    (0.018, 0.004, 0.15, 15.0, 4.0461, 0.30951, -1.18239, True),  # trapezoidal, 30 degrees
    (0.016, 0.005, 0.003, 45.0, 5.6806, 0.95869, 0.95694, False),  # ball screw, contact at 45 degrees
    (0.012, 0.020, 0.12, 0.0, 27.9467, 0.76361, 0.72749, False),  # square thread, steep
]


@pytest.mark.parametrize(("d_m", "lead_m", "f", "half_deg", "lead_deg", "forward", "back", "locks"), SCREWS)
def test_screw_has_the_efficiencies_of_the_textbook(
    d_m: float, lead_m: float, f: float, half_deg: float, lead_deg: float, forward: float, back: float, *, locks: bool
) -> None:
    """Lead angle, efficiency both ways and self-locking of four screws."""
    screw = Screw(d_m, lead_m, f, math.radians(half_deg))

    # Reference: textbook relations computed apart with five digits.
    assert math.degrees(screw.lead_angle_rad) == pytest.approx(lead_deg, abs=1e-4)
    assert screw.efficiency_forward == pytest.approx(forward, abs=2e-5)
    assert screw.efficiency_back == pytest.approx(back, abs=2e-5)
    assert screw.self_locking is locks


@given(st.floats(0.005, 0.05), st.floats(0.001, 0.03), st.floats(0.0, 0.2), st.floats(0.0, 0.8), st.floats(1.0, 1e4))
def test_screw_locks_itself_exactly_where_it_gives_nothing_back(
    d_m: float, lead_m: float, f: float, half_rad: float, force_N: float
) -> None:
    """Lowering needs a torque if and only if the screw locks itself; raising needs more than the ideal."""
    screw = Screw(d_m, lead_m, f, half_rad)

    assert screw.self_locking is (screw.lower_Nm(force_N) > 0.0)
    assert screw.raise_Nm(force_N) >= force_N * lead_m / (2.0 * math.pi) * (1.0 - 1e-12)


def test_screw_of_small_friction_agrees_with_two_minus_one_over_eta() -> None:
    """The general rule for the way back is the limit of the screw's own formula."""
    screw = Screw(0.016, 0.005, 0.0001)

    assert screw.efficiency_back == pytest.approx(backward_efficiency(screw.efficiency_forward), abs=1e-5)


def test_impossible_screw_is_refused() -> None:
    """A lead of zero moves nothing."""
    with pytest.raises(SettingError, match="lead_m"):
        Screw(0.01, 0.0, 0.1)


STRIBECK = {0.0: 1.5, 0.0001: 1.495064917, 0.0005: 1.389600392, 0.001: 1.184339721, 0.002: 1.009957819}
STRIBECK |= {0.005: 1.002, 0.01: 1.004, 0.1: 1.04}


def test_friction_follows_the_stribeck_curve() -> None:
    """The curve of the LuGre paper's parameter set, in its own units."""
    joint = drive(coulomb_Nm=1.0, breakaway_Nm=1.5, stribeck_rad_per_s=0.001, viscous_Nms_per_rad=0.4)

    found = friction_Nm(joint, np.array(list(STRIBECK)))

    # Parameters: Canudas de Wit et al. 1995; values computed apart.
    assert found == pytest.approx(list(STRIBECK.values()), abs=1e-9)


def test_friction_turns_with_the_speed() -> None:
    """Backwards it is the same with the other sign."""
    joint = drive(coulomb_Nm=1.0, breakaway_Nm=1.5, stribeck_rad_per_s=0.1, viscous_Nms_per_rad=0.4, load_share=0.2)
    v = np.array([0.01, 0.2, 3.0])

    assert friction_Nm(joint, -v, load_Nm=5.0) == pytest.approx(-friction_Nm(joint, v, load_Nm=5.0), abs=1e-15)


def test_efficiency_of_one_half_gives_nothing_back() -> None:
    """2 - 1/0.5 = 0: the limit of self-locking."""
    assert backward_efficiency(0.5) == pytest.approx(0.0, abs=1e-15)
    assert backward_efficiency(0.8) == pytest.approx(0.75, abs=1e-15)  # by hand


def test_load_share_gives_both_efficiencies() -> None:
    """1/(1 + mu) forward, 1 - mu back."""
    assert load_efficiencies(0.25) == pytest.approx((0.8, 0.75), abs=1e-15)  # by hand


def test_frictionless_drive_shows_all_of_a_load_change() -> None:
    """Nothing holds, all is seen."""
    assert observable_share(drive(), 2.0) == 1.0


def test_screw_drive_at_rest_shows_nothing() -> None:
    """With a forward efficiency of 0.4 the drive locks itself: mu = 1.5."""
    assert observable_share(drive(load_share=1.5), 100.0) == 0.0


def test_friction_band_hides_its_width_of_a_load_change() -> None:
    """Of a change of 2 Nm, 2 * 0.4 Nm may stay in the friction."""
    assert observable_share(drive(coulomb_Nm=0.4, breakaway_Nm=0.4), 2.0) == pytest.approx(0.6, abs=1e-15)  # by hand


def test_change_smaller_than_the_band_is_not_seen() -> None:
    """0.5 Nm within a band of 0.8 Nm."""
    assert observable_share(drive(coulomb_Nm=0.4, breakaway_Nm=0.4), 0.5) == 0.0


def test_joint_the_force_does_not_load_has_no_share() -> None:
    """A force along a joint's axis gives no torque there: no share can be told."""
    jacobian = np.array([[0.0, 0.3], [0.2, 0.0], [0.0, 0.0]])

    shares = observable_by_posture((drive(), drive()), jacobian, np.array([10.0, 0.0, 0.0]), np.zeros(2))

    assert np.isnan(shares[0])
    assert shares[1] == 1.0
