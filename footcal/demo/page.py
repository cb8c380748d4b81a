"""The demo's report: what a practitioner wants to see of feet, walks and weeks, on one page."""

from __future__ import annotations

import os

import numpy as np

from footcal.demo.run import DemoResult
from footcal.demo.tables import DRIFT_HEADER, FOOT_HEADER, WALK_HEADER, drift_rows, foot_rows, walk_rows
from footcal.demo.trial import TriedFoot
from footcal.demo.walks import FusedWalk
from footcal.drift.records import StoredCheck
from footcal.drift.verdict import FootVerdict
from footcal.fusion.align import truth_at
from footcal.records import BoolArray, FloatArray
from footcal.report.calibration import KIND_WORDS
from footcal.report.calibration_pictures import foot_pictures
from footcal.report.drift import DriftSeries, draw_drift
from footcal.report.page import Page, Picture, Section, Table, picture, write_page
from footcal.report.points import hold_points
from footcal.report.style import new_figure
from footcal.report.walk import draw_contacts, draw_forces, draw_probability

SHOWN_s = 2.6  # two strides of the demo's walk
PROBABILITY_s = 0.4


def write_demo_report(result: DemoResult, path: str | os.PathLike[str]) -> None:
    """Write the report; raises SettingError where the place can't be written."""
    write_page(demo_page(result), path)


def demo_page(result: DemoResult) -> Page:
    """Return the report of a demo run as a page."""
    bad = [verdict for verdict in result.verdicts if verdict.needs_action]
    right = [f"{walk.score.contact.right_pct:.1f} %" for walk in result.walks]
    return Page(
        title="Four feet, two walks, ten weeks",
        kicker="footcal demo",
        lead=(
            "Two load cells and two squash pads were calibrated from their bench sessions, a walk was fused on belt "
            "and on screw drives, and ten weekly checks were scored. All errors are against the simulated truth."
        ),
        figures=(
            *((f"contact right, {walk.drive}", value) for walk, value in zip(result.walks, right, strict=True)),
            *(
                (f"vertical RMSE, {walk.drive}, of weight", f"{walk.score.force.vertical_rmse_pct:.1f} %")
                for walk in result.walks
                if walk.score.force
            ),
            ("feet that need action", f"{len(bad)} of {len(result.verdicts)}"),
        ),
        sections=(
            _feet(result),
            *(_walk(walk) for walk in result.walks),
            _drift(result),
            Section(
                "Where to look next",
                words=(
                    f"Calibration files, the walk on screw drives and the drift history lie in {result.out.name}/.",
                    "Your own foot: footcal fit SESSION --out FOOT.cal.json --report report.html",
                    "Your own log: footcal fuse --robot robot.toml --from log.parquet --to estimate.parquet",
                ),
            ),
        ),
        invented=True,
    )


def _feet(result: DemoResult) -> Section:
    shown = [result.feet[0], next(tried for tried in result.feet if tried.calibration.kind != "cell")]
    words = "Errors on another day than the bench's: RMS over settled holds of any load, and over simulated stances."
    return Section(
        "Calibration",
        words=(words,),
        tables=(Table("Errors of the calibrated feet", FOOT_HEADER, foot_rows(result), left=(0, 1, 2)),),
        pictures=tuple(part for tried in shown for part in _of_foot(tried)),
    )


def _of_foot(tried: TriedFoot) -> tuple[Picture, ...]:
    name = f"{tried.foot.foot_id}, {KIND_WORDS[tried.calibration.kind]}"
    return foot_pictures(tried.result, hold_points(tried.result), tried.foot.foot_id, name)


def _walk(walk: FusedWalk) -> Section:
    true_N, true_contact = truth_at(walk.truth, walk.estimate.t_s, 0.0)
    truth = true_contact > 0.5
    return Section(
        f"Walk on {walk.drive} drives",
        tables=(Table("Errors of the fusion", WALK_HEADER, walk_rows([walk])),),
        pictures=(_forces(walk, true_N), _contacts(walk, truth), _probability(walk, truth)),
    )


def _forces(walk: FusedWalk, true_N: FloatArray) -> Picture:
    t_s, force = walk.estimate.t_s, walk.score.force
    part = np.abs(t_s - 0.5 * (t_s[0] + t_s[-1])) <= 0.5 * SHOWN_s
    figure = draw_forces(
        new_figure(180.0, 110.0),
        t_s[part],
        walk.estimate.force_B_N[part, :, 2],
        np.sqrt(np.maximum(walk.estimate.cov_B_N2[part, :, 5], 0.0)),
        true_N[part, :, 2],
        walk.legs,
    )
    rmse = f"{force.vertical_rmse_N:.1f} N ({force.vertical_rmse_pct:.1f} % of body weight)" if force else "unknown"
    return picture(
        figure,
        f"walk_{walk.drive}_forces",
        "Vertical force over two strides",
        f"Vertical ground reaction of {len(walk.legs)} legs, estimate with a band of two standard deviations, and "
        f"truth; over the whole walk the RMSE in stance is {rmse}.",
        wide=True,
    )


def _contacts(walk: FusedWalk, truth: BoolArray) -> Picture:
    t_s, found = walk.estimate.t_s, walk.score.contact
    figure = draw_contacts(new_figure(180.0, 70.0, left_mm=26.0), t_s, walk.estimate.contact == 1, truth, walk.legs)
    return picture(
        figure,
        f"walk_{walk.drive}_contacts",
        "Who stands when",
        f"Contact of {len(walk.legs)} legs over {t_s[-1] - t_s[0]:.1f} s: {found.right_pct:.1f} % of samples right, "
        f"{found.touchdown.matched} of {found.touchdown.edges} touchdowns found, "
        f"{found.touchdown.median_ms:.0f} ms late in the median.",
        caption="Filled: estimate. Hatched: truth. Ticks mark where they differ.",
        wide=True,
    )


def _probability(walk: FusedWalk, truth: BoolArray) -> Picture:
    t_s = walk.estimate.t_s
    touchdown_s, leg = _middle_touchdown(t_s, truth)
    part = np.abs(t_s - touchdown_s) <= 0.5 * PROBABILITY_s
    figure = draw_probability(
        new_figure(180.0, 55.0),
        t_s[part],
        walk.estimate.p_contact[part, leg],
        walk.estimate.contact[part, leg] == 1,
        truth[part, leg],
    )
    return picture(
        figure,
        f"walk_{walk.drive}_probability",
        f"Probability of contact, {walk.legs[leg]}, round a touchdown",
        f"Probability that {walk.legs[leg]} stands, the decision made from it, and the truth shaded, over "
        f"{PROBABILITY_s:g} s round the touchdown at {touchdown_s:.2f} s.",
        wide=True,
    )


def _middle_touchdown(t_s: FloatArray, truth: BoolArray) -> tuple[float, int]:
    """Return time and leg of the true touchdown nearest to the middle of the walk."""
    rows, legs = np.nonzero(np.diff(truth.astype(np.int8), axis=0) == 1)
    if not len(rows):
        return float(t_s[len(t_s) // 2]), 0
    nearest = int(np.argmin(np.abs(rows - len(t_s) // 2)))
    return float(t_s[rows[nearest]]), int(legs[nearest])


def _drift(result: DemoResult) -> Section:
    pictures = []
    for verdict in result.verdicts:
        own = [check for check in result.checks if check.foot_id == verdict.foot_id]
        pictures.append(_drift_picture(verdict, own))
    return Section(
        "Ten weeks of checks",
        words=("A short check each week, held against the calibration: one foot was made to go bad on purpose.",),
        tables=(Table("Verdicts", DRIFT_HEADER, drift_rows(result), left=(0, 1, 2, 3)),),
        pictures=tuple(pictures),
    )


def _drift_picture(verdict: FootVerdict, checks: list[StoredCheck]) -> Picture:
    days = [check.t_utc.date() for check in checks]
    span = DriftSeries(
        days,
        np.array([check.span_pct for check in checks]),
        np.array([check.span_u_pct for check in checks]),
        checks[-1].limit_span_pct,
    )
    zero = DriftSeries(
        days,
        np.array([check.zero_N for check in checks]),
        np.array([check.zero_u_N for check in checks]),
        checks[-1].limit_zero_N,
    )
    words = f"Span and zero of foot {verdict.foot_id} over {len(checks)} checks: {verdict.text}; {verdict.reason}."
    figure = draw_drift(new_figure(height_mm=85.0), span, zero, verdict.since)
    return picture(figure, f"drift_{verdict.foot_id}", f"{verdict.foot_id}: {verdict.text}", words, caption=words)
