"""The verdict on one foot, and on many."""

from __future__ import annotations

import datetime as dt
import json

import pytest

from footcal.drift.records import StoredCheck
from footcal.drift.verdict import FootVerdict, fleet_verdicts, foot_verdict, since_adjustment
from tests.drift.stand_in import START, stored

QUIET = [stored(week) for week in range(6)]  # a 500 N cell: 1 % span and 2.5 N zero are allowed


def after_quiet(*checks: StoredCheck) -> FootVerdict:
    """Return the verdict after six quiet weeks and some more checks."""
    return foot_verdict([*QUIET, *checks])


def test_a_foot_that_has_not_moved_is_fit_for_use() -> None:
    """It needs no action, and nothing has been wrong since any day."""
    verdict = foot_verdict(QUIET)
    assert verdict.text == "fit for use"
    assert not verdict.needs_action
    assert verdict.since is None
    assert verdict.p_out < 0.01


@pytest.mark.parametrize("span_pct", [1.5, -1.5])
def test_a_span_beyond_its_limit_asks_for_recalibration_now(span_pct: float) -> None:
    """Two weeks at 1.5 %, either way, where 1 % is allowed; it is so since the first of the two."""
    verdict = after_quiet(stored(6, span_pct=span_pct), stored(7, span_pct=span_pct))
    assert verdict.text == "recalibrate now"
    assert verdict.since == (START + dt.timedelta(weeks=6)).date()
    assert verdict.span_pct == pytest.approx(span_pct, abs=0.05)
    assert "span" in verdict.reason


def test_a_single_surprising_check_is_said_to_be_one() -> None:
    """The reason asks to repeat it first."""
    assert "repeat it first" in after_quiet(stored(6, span_pct=1.5)).reason


def test_a_zero_beyond_its_limit_asks_for_a_new_zero() -> None:
    """4 N where 2.5 N are allowed; the span is good."""
    verdict = after_quiet(stored(6, zero_N=4.0), stored(7, zero_N=4.0))
    assert verdict.text == "re-zero"
    assert "zero" in verdict.reason


def test_zero_and_span_both_outside_ask_for_recalibration() -> None:
    """A new zero alone would not do."""
    assert (
        after_quiet(stored(6, zero_N=4.0, span_pct=2.0), stored(7, zero_N=4.0, span_pct=2.0)).text == "recalibrate now"
    )


def test_a_steady_drift_asks_for_recalibration_before_the_limit_is_met() -> None:
    """0.06 % a week meets 1 % in week 16.7; after week 13 a date is given that lies before it, and after today."""
    verdict = foot_verdict([stored(week, span_pct=0.06 * week) for week in range(14)])
    assert verdict.verdict == "recalibrate by"
    assert verdict.by is not None
    assert verdict.text == f"recalibrate by {verdict.by.isoformat()}"
    assert verdict.last_check < verdict.by <= (START + dt.timedelta(weeks=16.7)).date()
    assert verdict.due is not None
    # By hand: 1 / 0.06 = 16.7 weeks after the start; two weeks either way for what 14 checks leave open.
    assert abs(verdict.due - (START + dt.timedelta(weeks=16.7)).date()) < dt.timedelta(weeks=2)


def test_a_foot_that_may_be_outside_within_its_uncertainty_is_not_passed() -> None:
    """Guarded acceptance: 0.9 % known to 0.1 % is inside with 84 %, which is not enough."""
    verdict = foot_verdict([stored(0, span_pct=0.9, u=0.1)])
    assert verdict.verdict == "recalibrate by"
    assert 0.05 < verdict.p_out < 0.5


@pytest.mark.parametrize(
    ("bad", "word"),
    [
        (stored(6, span_pct=11.0), "span"),  # gain change > 10 %
        (stored(6, zero_N=60.0), "zero"),  # zero beyond 10 % of 500 N
        (stored(6, loop_N=8.0), "loop"),  # from 0.1 N, far more than doubled, and large
        (stored(6, noise_N=0.16), "noise"),  # from 0.05 N, more than tripled
    ],
)
def test_a_worn_foot_is_to_be_replaced(bad: StoredCheck, word: str) -> None:
    """The criteria of issue 9, each named in the reason."""
    verdict = after_quiet(bad)
    assert verdict.text == "replace"
    assert word in verdict.reason


def test_an_adjustment_starts_anew() -> None:
    """After an as-left check the earlier drift no longer counts."""
    drifted = [stored(week, span_pct=0.3 * week) for week in range(6)]
    verdict = foot_verdict([*drifted, stored(6, state="as-left"), stored(7)])
    assert verdict.text == "fit for use"
    assert verdict.span_pct == pytest.approx(0.0, abs=0.05)


def test_a_new_calibration_file_starts_anew() -> None:
    """Deviations from two files are not one series."""
    checks = [stored(0, span_pct=2.0), stored(1, calibration="d"), stored(2, calibration="d")]
    assert [check.id for check in since_adjustment(checks)] == [1, 2]


def test_the_worst_foot_comes_first() -> None:
    """Replace, then recalibrate now, then the good one, whatever their names."""
    checks = [
        stored(0, foot_id="a"),
        stored(0, foot_id="b", span_pct=3.0),
        stored(0, foot_id="c", span_pct=20.0),
    ]
    assert [verdict.foot_id for verdict in fleet_verdicts(checks)] == ["c", "b", "a"]


def test_the_json_form_has_the_keys_of_the_design() -> None:
    """DESIGN §4: foot_id, verdict, reason, p_out, due, due_lo, due_hi, zero_N, span_pct, since; dates in ISO form."""
    document = after_quiet(stored(6, span_pct=1.5), stored(7, span_pct=1.5)).as_json()
    assert list(document) == [
        *("foot_id", "verdict", "reason", "p_out", "due", "due_lo", "due_hi", "zero_N", "span_pct", "since")
    ]
    assert json.loads(json.dumps(document))["since"] == "2031-05-14"  # by hand: 2031-04-02 and six weeks


def test_the_reason_is_one_sentence() -> None:
    """No line break, no full stop inside."""
    for checks in (QUIET, [stored(0, span_pct=1.5)], [stored(0, zero_N=9.0)], [stored(0, span_pct=12.0)]):
        reason = foot_verdict(checks).reason
        assert "\n" not in reason
        assert ". " not in reason
