"""The streaming compensator."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from footcal.errors import SettingError
from footcal.records import SENSOR_GAP_NS, Health
from footcal.sensor import kernel
from footcal.sensor.compensator import Compensator
from footcal.sensor.creep import creep_columns
from footcal.sensor.hysteresis import play_columns
from tests.sensor.models import straight_line, with_memory

MS = 1_000_000


def walk(n: int = 400, dt_ms: int = 10) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Times, counts and temperatures of a foot that goes up and down."""
    t_ns = np.arange(1, n + 1, dtype=np.int64) * dt_ms * MS
    raw = 400.0 - 390.0 * np.cos(t_ns * 1e-9 * 5.0)
    return t_ns, raw, np.full(n, 25.0)


def test_without_loop_creep_and_temperature_it_is_the_straight_line() -> None:
    """The full model at its simplest limit: force = raw / 10 (by hand)."""
    t_ns, raw, temp_C = walk()
    assert Compensator(straight_line()).run(t_ns, raw, temp_C).force_N == pytest.approx(raw / 10.0, abs=1e-12)


def test_one_reading_at_a_time_gives_the_same_bits_as_a_whole_column() -> None:
    """Live and replay take the same code."""
    t_ns, raw, temp_C = walk()
    whole = Compensator(with_memory()).run(t_ns, raw, temp_C)
    single = Compensator(with_memory())
    each = [single.step(int(t), float(r), 25.0) for t, r in zip(t_ns, raw, strict=True)]
    assert np.array([one[0] for one in each]).tobytes() == whole.force_N.tobytes()
    assert np.array([one[1] for one in each]).tobytes() == whole.u_N.tobytes()
    assert [one[2] for one in each] == whole.flags.tolist()


def test_a_restored_state_goes_on_with_the_same_bits() -> None:
    """Saved half way and restored into another object."""
    t_ns, raw, temp_C = walk()
    whole = Compensator(with_memory()).run(t_ns, raw, temp_C).force_N
    first, second = Compensator(with_memory()), Compensator(with_memory())
    first.run(t_ns[:200], raw[:200], temp_C[:200])
    second.restore(first.snapshot())
    assert second.run(t_ns[200:], raw[200:], temp_C[200:]).force_N.tobytes() == whole[200:].tobytes()


def test_a_state_of_another_length_is_refused() -> None:
    """Restoring what is no state says so."""
    with pytest.raises(SettingError, match="state has 3 bytes"):
        Compensator(straight_line()).restore(b"abc")


def test_the_kernel_sees_the_same_creep_and_loop_as_the_laws_alone() -> None:
    """Force from the compiled step against the features of the law files, summed by hand."""
    t_ns, raw, temp_C = walk()
    model = with_memory()
    v = raw / 1000.0
    theta = (25.0 - 22.0) / 16.0
    creep = creep_columns(t_ns, v)
    loop = play_columns(t_ns, v + creep @ model.creep_undone)
    share = v - 0.2 * loop[:, 1] + 0.03 * creep[:, 4] + 0.01 * theta * v
    share += 0.3 * theta * (creep @ model.creep_undone)
    assert Compensator(model).run(t_ns, raw, temp_C).force_N == pytest.approx(100.0 * share, abs=1e-10)


def test_an_empty_reading_repeats_the_last_force() -> None:
    """NaN is no new reading."""
    found = Compensator(straight_line()).run(
        np.array([1, 2, 3]) * 10 * MS, np.array([100.0, np.nan, 120.0]), np.full(3, 22.0)
    )
    assert found.force_N == pytest.approx([10.0, 10.0, 12.0])


def test_a_time_that_does_not_advance_changes_nothing() -> None:
    """An interval of 0 or less is dropped."""
    found = Compensator(straight_line()).run(
        np.array([10, 10, 5, 20]) * MS, np.array([100.0, 900.0, 900.0, 110.0]), np.full(4, 22.0)
    )
    assert found.force_N == pytest.approx([10.0, 10.0, 10.0, 11.0])


def test_a_lone_spike_is_held_back_and_flagged() -> None:
    """One sample at half scale between two near zero, 1 ms apart."""
    raw = np.array([10.0, 10.0, 600.0, 10.0, 10.0])
    found = Compensator(straight_line()).run(np.arange(1, 6) * MS, raw, np.full(5, 22.0))
    assert found.force_N == pytest.approx([1.0, 1.0, 1.0, 1.0, 1.0])
    assert [bool(flag & Health.SPIKE) for flag in found.flags] == [False, False, True, False, False]


def test_a_real_impact_passes_after_one_sample() -> None:
    """A jump that stays is real; it costs one sample of delay."""
    raw = np.array([10.0, 10.0, 600.0, 620.0, 640.0])
    found = Compensator(straight_line()).run(np.arange(1, 6) * MS, raw, np.full(5, 22.0))
    assert found.force_N[3:] == pytest.approx([62.0, 64.0])


def test_the_start_state_is_flagged_until_time_and_swing_have_passed() -> None:
    """settle_s 1 s and a swing of 10 % of full scale."""
    t_ns = np.arange(1, 301, dtype=np.int64) * 10 * MS
    raw = np.where(t_ns < 2_000_000_000, 50.0, 300.0)
    flags = Compensator(straight_line()).run(t_ns, raw, np.full(300, 22.0)).flags
    unforgotten = (flags & Health.START_STATE_UNFORGOTTEN) != 0
    assert unforgotten[:198].all()
    assert not unforgotten[200:].any()


def test_a_gap_of_more_than_a_minute_starts_afresh() -> None:
    """After the gap the force is that of a fresh start at the same reading."""
    model = with_memory()
    t_ns, raw, temp_C = walk()
    gone_on = Compensator(model)
    gone_on.run(t_ns, raw, temp_C)
    later = t_ns[-1] + SENSOR_GAP_NS + 1
    assert gone_on.step(int(later), 500.0, 25.0)[0] == Compensator(model).step(int(later), 500.0, 25.0)[0]


@pytest.mark.parametrize(
    ("raw", "temp_C", "flag"),
    [
        (1500.0, 22.0, Health.EXTRAPOLATED),
        (1500.0, 22.0, Health.OUTSIDE_VALIDITY),
        (500.0, 55.0, Health.OUTSIDE_VALIDITY),
        (2000.0, 22.0, Health.SATURATED),
        (-2000.0, 22.0, Health.SATURATED),
    ],
)
def test_what_lies_outside_is_flagged(raw: float, temp_C: float, flag: Health) -> None:
    """Above the highest load, outside the temperatures, at the ends of the converter."""
    assert Compensator(straight_line()).step(MS, raw, temp_C)[2] & flag


def test_a_good_reading_inside_the_range_has_no_flag() -> None:
    """Once the start is forgotten, nothing is raised."""
    t_ns, raw, temp_C = walk()
    assert Compensator(straight_line()).run(t_ns, raw, temp_C).flags[-1] == 0


def test_a_foot_calibrated_on_slow_holds_says_so() -> None:
    """not_dynamic stands on every sample."""
    assert Compensator(straight_line(dynamic=False)).step(MS, 500.0, 22.0)[2] & Health.NOT_DYNAMIC


def test_the_bits_spelled_out_in_the_kernel_are_those_of_the_records() -> None:
    """Compiled code freezes module values, so they stand there twice; here they are compared."""
    names = ("SATURATED", "SPIKE", "UNCALIBRATED", "OUTSIDE_VALIDITY", "EXTRAPOLATED", "START_STATE_UNFORGOTTEN")
    assert [getattr(kernel, name) for name in names] == [int(Health[name]) for name in names]
    assert kernel.SENSOR_GAP_NS == SENSOR_GAP_NS


def test_a_wrong_start_state_is_forgotten_within_ten_steps() -> None:
    """Power-up under load against power-up long before: the two agree to 0.1 % of full scale after ten steps."""
    model = with_memory()
    t_ns = np.arange(1, 12_000, dtype=np.int64) * MS
    raw = np.maximum(0.0, 800.0 * np.sin(t_ns * 1e-9 * np.pi))
    early = Compensator(model).run(t_ns, raw, np.full(len(t_ns), 22.0)).force_N
    begin = 500
    late = Compensator(model).run(t_ns[begin:], raw[begin:], np.full(len(t_ns) - begin, 22.0)).force_N
    assert np.max(np.abs(early[-1000:] - late[-1000:])) < 0.1


@settings(max_examples=30)
@given(st.lists(st.floats(-1e7, 1e7), min_size=2, max_size=50))
def test_any_reading_gives_a_finite_force_and_uncertainty(raws: list[float]) -> None:
    """Garbage counts do no lasting harm: all results stay finite."""
    t_ns = np.arange(1, len(raws) + 1, dtype=np.int64) * 5 * MS
    found = Compensator(with_memory(lag_s=0.0005)).run(t_ns, np.array(raws), np.full(len(raws), 22.0))
    assert np.isfinite(found.force_N).all()
    assert np.isfinite(found.u_N).all()
