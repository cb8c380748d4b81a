"""The demo's result as rows for people and as one JSON document."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Final

from footcal.demo.run import DemoResult
from footcal.demo.trial import TriedFoot
from footcal.demo.walks import FusedWalk
from footcal.report.calibration import KIND_WORDS
from footcal.report.words import number

FOOT_HEADER: Final = ("foot", "leg", "sensor", "settled, % FS", "walking, % FS", "inside ±2u, %")
WALK_HEADER: Final = (
    *("drive", "contact right, %", "15 N threshold, %", "touchdown, ms"),
    *("vertical RMSE, % weight", "false / missed contacts"),
)
DRIFT_HEADER: Final = ("foot", "verdict", "why", "since")


def foot_rows(result: DemoResult) -> tuple[tuple[str, ...], ...]:
    """Return one row a foot: errors on another day, against the simulated truth."""
    return tuple(
        (
            *(tried.foot.foot_id, tried.foot.leg, KIND_WORDS[tried.calibration.kind]),
            *(number(value, ".2f") for value in (tried.static_pct_FS, tried.stance_pct_FS)),
            number(tried.covered_pct, ".0f"),
        )
        for tried in result.feet
    )


def walk_rows(walks: Sequence[FusedWalk]) -> tuple[tuple[str, ...], ...]:
    """Return one row a walk: errors of the fusion against the simulated truth."""
    rows = []
    for walk in walks:
        contact, force, plain = walk.score.contact, walk.score.force, walk.score.threshold
        rows.append(
            (
                walk.drive,
                number(contact.right_pct, ".2f"),
                number(plain.right_pct if plain else None, ".2f"),
                number(contact.touchdown.median_ms, "+.1f"),
                number(force.vertical_rmse_pct if force else None, ".2f"),
                f"{contact.false_contacts.count} / {contact.missed_contacts.count}",
            )
        )
    return tuple(rows)


def drift_rows(result: DemoResult) -> tuple[tuple[str, ...], ...]:
    """Return one row a foot that was checked, the worst first."""
    return tuple(
        (verdict.foot_id, verdict.text, verdict.reason, verdict.since.isoformat() if verdict.since else "–")
        for verdict in result.verdicts
    )


def document(result: DemoResult) -> dict[str, Any]:
    """Return the result for `--json`."""
    return {
        "invented": True,
        "out": str(result.out),
        "feet": [_foot(tried) for tried in result.feet],
        "walks": [_walk(walk) for walk in result.walks],
        "drift": [verdict.as_json() for verdict in result.verdicts],
    }


def _foot(tried: TriedFoot) -> dict[str, Any]:
    return {
        "foot_id": tried.foot.foot_id,
        "leg": tried.foot.leg,
        "kind": tried.calibration.kind,
        "static_pct_FS": tried.static_pct_FS,
        "stance_pct_FS": tried.stance_pct_FS,
        "covered_pct": tried.covered_pct,
        "sha256": tried.calibration.digest,
    }


def _walk(walk: FusedWalk) -> dict[str, Any]:
    contact, force, plain = walk.score.contact, walk.score.force, walk.score.threshold
    return {
        "drive": walk.drive,
        "rows": walk.score.rows,
        "contact_right_pct": contact.right_pct,
        "threshold_right_pct": plain.right_pct if plain else None,
        "touchdown_median_ms": contact.touchdown.median_ms,
        "vertical_rmse_pct": force.vertical_rmse_pct if force else None,
        "false_contacts": contact.false_contacts.count,
        "missed_contacts": contact.missed_contacts.count,
    }
