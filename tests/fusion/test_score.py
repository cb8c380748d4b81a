"""Scores on made-up estimates whose every figure is known by hand."""

from __future__ import annotations

import numpy as np
import pytest

from footcal.errors import SettingError
from footcal.files.truth import Truth
from footcal.fusion.estimate import EstimateColumns
from footcal.fusion.score import Score, rotations, score
from footcal.fusion.score_contact import contact_from_force, intervals, poisson_rate
from footcal.fusion.score_force import nees
from footcal.records import BoolArray, FloatArray


class Weighing:
    """Stands in for a robot: only its weight is asked for."""

    weight_N = 100.0


def run_of(contact: BoolArray, p: FloatArray, force_N: FloatArray, sd_N: float = 2.0) -> EstimateColumns:
    """One leg at 1 kHz; covariance sd^2 times unit matrix."""
    rows = len(contact)
    event = np.diff(contact.astype(np.int64), prepend=int(contact[0]))
    t_s = np.arange(rows) * 0.001
    zero = np.zeros((rows, 1))
    return EstimateColumns(
        legs=("leg",),
        t_s=t_s,
        p_contact=p[:, None],
        contact=contact[:, None].astype(np.int64),
        contact_known=np.ones((rows, 1), dtype=np.int64),
        event=event[:, None],
        t_event_s=np.where(event != 0, t_s, np.nan)[:, None],
        force_B_N=force_N[:, None, :],
        cov_B_N2=np.tile(sd_N**2 * np.array([1.0, 0, 0, 1.0, 0, 1.0]), (rows, 1, 1)),
        axial_N=force_N[:, 2:].copy(),
        axial_u_N=zero,
        sensor_bias_N=zero,
        foot_age_s=zero,
        motor_age_s=zero,
        health=np.zeros((rows, 1), dtype=np.int64),
    )


def stances(shift: int = 0, rows: int = 6000) -> BoolArray:
    """200 samples of contact every 500, from sample 100 (+ shift) on."""
    return np.asarray(((np.arange(rows) - 100 - shift) % 500 < 200) & (np.arange(rows) >= 100 + shift))


def vertical(contact: BoolArray, load_N: float = 50.0) -> FloatArray:
    """Return a vertical load in contact, nothing else."""
    force = np.zeros((len(contact), 3))
    force[:, 2] = load_N * contact
    return force


def truth_of(contact: BoolArray, force_N: FloatArray) -> Truth:
    """Return one leg of truth in the body frame."""
    t_s = np.arange(len(contact)) * 0.001
    return Truth(("leg",), "body", t_s, force_N[:, None, :], contact[:, None].astype(np.float64))


def scored(estimate: EstimateColumns, truth: Truth, *, align: bool = False) -> Score:
    """Score one leg of a robot of 100 N."""
    return score(estimate, truth, Weighing(), align=align)  # type: ignore[arg-type]


def test_a_perfect_estimate_scores_perfectly() -> None:
    """Equal contact and force: all right, no delay, no error, no false or missed contact."""
    contact = stances()
    result = scored(run_of(contact, contact.astype(float), vertical(contact)), truth_of(contact, vertical(contact)))
    assert result.contact.right_pct == 100.0
    assert result.contact.touchdown.median_ms == 0.0
    assert result.contact.false_contacts.count == result.contact.missed_contacts.count == 0
    assert result.contact.extra_edges_per_stance == 0.0
    assert result.force is not None
    assert result.force.vector_rmse_N == 0.0


def test_a_late_estimate_is_late_by_its_delay() -> None:
    """Contact 8 ms late everywhere: delay 8 ms both ways; per 500 samples 16 are wrong, 6 of them within 5 ms."""
    true, late = stances(), stances(shift=8)
    result = scored(run_of(late, late.astype(float), vertical(late)), truth_of(true, vertical(true)))
    assert result.contact.touchdown.median_ms == pytest.approx(8.0)
    assert result.contact.liftoff.median_ms == pytest.approx(8.0)
    # by hand: 12 touchdowns and 12 lift-offs, 8 wrong samples each, of 6000
    assert result.contact.right_pct == pytest.approx(100.0 * (1 - 24 * 8 / 6000))
    # samples -5 ... +5 about each of the 24 edges are left out: 11 each; wrong beyond them: samples 6 and 7
    assert result.contact.right_outside_pct == pytest.approx(100.0 * (1 - 24 * 2 / (6000 - 24 * 11)))


def test_a_clock_offset_is_found_and_taken_out() -> None:
    """An estimate whose clock is 37 ms behind: the offset is found within 1 ms, and aligning makes it perfect."""
    true, late = stances(), stances(shift=-37)
    estimate, truth = run_of(late, late.astype(float), vertical(late)), truth_of(true, vertical(true))
    kept, aligned = scored(estimate, truth), scored(estimate, truth, align=True)
    assert kept.clock_offset_s == pytest.approx(0.037, abs=0.001)
    assert not kept.aligned
    assert aligned.aligned
    assert aligned.contact.right_pct > 99.9 > kept.contact.right_pct


def test_false_and_missed_contacts_are_counted_with_exact_limits() -> None:
    """One stance dropped, one put where there is none: one of each; limits 0.0253 and 5.572 (Garwood, table)."""
    true, found = stances(), stances()
    found[600:800] = False
    found[4400:4410] = True
    result = scored(run_of(found, found.astype(float), vertical(found)), truth_of(true, vertical(true)))
    minutes = 5.999 / 60.0
    assert result.contact.false_contacts.count == result.contact.missed_contacts.count == 1
    assert result.contact.false_contacts.low == pytest.approx(0.02532 / minutes, rel=1e-3)
    assert result.contact.false_contacts.high == pytest.approx(5.5716 / minutes, rel=1e-3)
    assert result.contact.extra_edges_per_stance == pytest.approx(2 / 12)  # the false stance has two edges


def test_no_event_in_ten_minutes_still_has_an_upper_limit() -> None:
    """Zero counts: the upper 95 % limit is 3.689 / T (table), the lower is 0."""
    rate = poisson_rate(0, 10.0)
    assert (rate.per_minute, rate.low) == (0.0, 0.0)
    assert rate.high == pytest.approx(0.3689, rel=1e-3)


def test_force_errors_are_those_put_in() -> None:
    """3 N too much upwards and 4 N sideways: 3 N vertical, 5 N vector, 3 % and 5 % of 100 N, bias +3 N."""
    contact = stances()
    force = vertical(contact)
    force[contact] += [4.0, 0.0, 3.0]
    result = scored(run_of(contact, contact.astype(float), force), truth_of(contact, vertical(contact))).force
    assert (result.vertical_rmse_N, result.vector_rmse_N) == (pytest.approx(3.0), pytest.approx(5.0))
    assert (result.vertical_rmse_pct, result.vector_rmse_pct) == (pytest.approx(3.0), pytest.approx(5.0))
    assert result.vertical_bias_N == pytest.approx(3.0)
    # by hand: (16 + 9) / 2^2 = 6.25 over 3 dimensions
    assert result.nees_stance_mean == pytest.approx(6.25 / 3)


def test_honest_gaussian_errors_have_a_mean_nees_of_one() -> None:
    """Errors drawn with the stated covariance: mean over dimension 1, 95 % inside the two-sided bounds."""
    rng = np.random.default_rng(7)
    contact = np.ones(20_000, dtype=bool)
    force = vertical(contact) + 2.0 * rng.standard_normal((20_000, 3))
    result = scored(run_of(contact, contact.astype(float), force), truth_of(contact, vertical(contact))).force
    # standard error of the mean: sqrt(2 / (3 * 20 000)) = 0.006; four of them
    assert result.nees_stance_mean == pytest.approx(1.0, abs=0.024)
    assert result.nees_stance_inside_pct == pytest.approx(95.0, abs=0.7)


def test_nees_uses_the_whole_covariance() -> None:
    """Correlated case by hand: P = [[2, 1, 0], [1, 2, 0], [0, 0, 1]], e = (1, 1, 1): 2/3 + 1 = 5/3."""
    value = nees(np.ones((1, 3)), np.array([[2.0, 1.0, 0.0, 2.0, 0.0, 1.0]]))
    assert value == pytest.approx([5 / 3])


def test_brier_scores_by_hand() -> None:
    """P = 0.8 in contact and 0.3 out of it: mean of 0.04 (2/5 of samples) and 0.09 = 0.07; every tenth told."""
    contact = np.arange(5000) % 500 < 200
    p = np.where(contact, 0.8, 0.3)
    result = scored(run_of(contact, p, vertical(contact)), truth_of(contact, vertical(contact))).contact
    assert result.brier == pytest.approx(0.4 * 0.04 + 0.6 * 0.09)
    assert result.reliability[8].observed == 1.0
    assert result.reliability[3].samples == 3000


def test_contact_is_found_in_forces_with_gaps_closed_and_touches_dropped() -> None:
    """At 1 kHz a gap of 11 ms is closed, one of 12 ms is not; a touch of 7 ms is dropped, one of 8 ms is not."""
    force = np.zeros(1000)
    force[100:200] = force[211:300] = 50.0
    force[400:450] = force[462:500] = 50.0
    force[600:607] = force[700:708] = 5.0
    found = intervals(contact_from_force(np.arange(1000) * 0.001, force))
    assert found.tolist() == [[100, 300], [400, 450], [462, 500], [700, 708]]


def test_world_truth_without_an_attitude_is_refused() -> None:
    """Forces in the world frame can't be compared unless the log's attitude is given."""
    contact = stances()
    truth = Truth(
        ("leg",), "world", np.arange(6000) * 0.001, vertical(contact)[:, None], contact[:, None].astype(float)
    )
    with pytest.raises(SettingError, match="attitude"):
        scored(run_of(contact, contact.astype(float), vertical(contact)), truth)


def test_truth_of_another_time_is_refused() -> None:
    """Truth that begins after the estimate has ended shares no sample with it."""
    contact = stances()
    truth = Truth(
        ("leg",), "body", 100.0 + np.arange(6000) * 0.001, vertical(contact)[:, None], contact[:, None].astype(float)
    )
    with pytest.raises(SettingError, match="shares no time"):
        scored(run_of(contact, contact.astype(float), vertical(contact)), truth)


def test_a_quarter_turn_about_z_brings_x_to_y() -> None:
    """Quaternion (cos 45, 0, 0, sin 45): body x points along world y (by hand)."""
    half = np.sqrt(0.5)
    assert rotations(np.array([[half, 0.0, 0.0, half]]))[0] @ [1.0, 0.0, 0.0] == pytest.approx([0.0, 1.0, 0.0])
