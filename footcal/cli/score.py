"""`footcal score`: an estimate against truth, beside a plain threshold."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

if TYPE_CHECKING:
    from footcal.fusion.score import Score
    from footcal.fusion.score_contact import ContactScore, Delays, Rate
    from footcal.fusion.score_force import ForceScore


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command(epilog="Example: footcal score estimate.parquet truth.parquet --robot robot.toml --json")(score)


def score(
    estimate: Annotated[Path, typer.Argument(help="Estimate written by footcal fuse.")],
    truth: Annotated[Path, typer.Argument(help="Truth: t_s, <leg>.fx_N, fy_N, fz_N, <leg>.contact.")],
    robot: Annotated[Path, typer.Option("--robot", help="Robot description (robot.toml).")],
    log: Annotated[Path | None, typer.Option("--log", help="The log, for its attitude (world axes).")] = None,
    frame: Annotated[str | None, typer.Option("--frame", help="Frame of the truth: body or world.")] = None,
    align: Annotated[bool, typer.Option("--align/--no-align", help="Take the clock offset out.")] = True,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Tell how good an estimate is: contact, delays, force, and whether probabilities and covariances are honest."""
    from footcal.cli.console import print_json, print_table
    from footcal.files.truth import read_truth
    from footcal.fusion.estimate_files import read_estimate
    from footcal.fusion.score import score as score_of
    from footcal.leg import Robot

    description = Robot.load(robot)
    found = read_estimate(estimate, description.leg_names)
    true = read_truth(truth, description.leg_names, frame)
    result = score_of(found, true, description, align=align, log=None if log is None else _whole(description, log))
    if json:
        print_json(result.as_dict())
        return
    taken = "taken out" if result.aligned else "kept"
    title = (
        f"{result.minutes:.2f} min, {result.rows} rows; truth's clock {1e3 * result.clock_offset_s:+.2f} ms, {taken}"
    )
    print_table(title, ("contact", "fusion", "15 N threshold"), _contact_rows(result))
    if result.force is not None:
        print_table("Force over true stance", ("force", "fusion"), _force_rows(result.force))


def _whole(description: Any, log: Path) -> Any:
    from footcal.files.columns import ColumnRule
    from footcal.files.robot_log import read_robot_log

    rules = {name: ColumnRule(rule.name, rule.scale, rule.offset) for name, rule in description.columns().items()}
    return read_robot_log(log, description.leg_names, description.joint_counts, rules)


def _contact_rows(result: Score) -> list[tuple[str, str, str]]:
    names = (
        "right, all samples",
        "right, more than 5 ms from a true change",
        "right, where contact is known",
        "false contacts per minute (95 % limits)",
        "missed contacts per minute (95 % limits)",
        "touchdown delay, median / p95",
        "lift-off delay, median / p95",
        "event times, touchdown / lift-off, median",
        "extra edges per stance",
        "Brier score, probability / decision",
    )
    plain = [""] * len(names) if result.threshold is None else _contact_cells(result.threshold)
    return list(zip(names, _contact_cells(result.contact), plain, strict=True))


def _contact_cells(contact: ContactScore) -> list[str]:
    return [
        f"{contact.right_pct:.2f} %",
        f"{contact.right_outside_pct:.2f} %",
        f"{contact.right_known_pct:.2f} % of {contact.known_pct:.1f} %",
        _rate(contact.false_contacts),
        _rate(contact.missed_contacts),
        _delay(contact.touchdown),
        _delay(contact.liftoff),
        f"{contact.touchdown.event_median_ms:.1f} / {contact.liftoff.event_median_ms:.1f} ms",
        f"{contact.extra_edges_per_stance:.3f}",
        f"{contact.brier:.4f} / {contact.brier_hard:.4f}",
    ]


def _rate(rate: Rate) -> str:
    return f"{rate.per_minute:.2f} ({rate.low:.2f} to {rate.high:.2f})"


def _delay(delays: Delays) -> str:
    return f"{delays.median_ms:.1f} / {delays.p95_ms:.1f} ms, {delays.matched} of {delays.edges}"


def _force_rows(force: ForceScore) -> list[tuple[str, str]]:
    return [
        ("vertical RMSE", f"{force.vertical_rmse_N:.2f} N, {force.vertical_rmse_pct:.2f} % of body weight"),
        ("vector RMSE", f"{force.vector_rmse_N:.2f} N, {force.vector_rmse_pct:.2f} % of body weight"),
        ("vertical bias", f"{force.vertical_bias_N:+.2f} N"),
        ("RMSE in swing", f"{force.swing_rmse_N:.2f} N"),
        (
            "NEES in stance: mean, inside 95 % bounds",
            f"{force.nees_stance_mean:.2f}, {force.nees_stance_inside_pct:.0f} %",
        ),
        ("NEES in swing: mean, below upper bound", f"{force.nees_swing_mean:.2f}, {force.nees_swing_below_pct:.0f} %"),
        ("2-sigma width in swing", f"{force.swing_width_pct:.2f} % of body weight"),
    ]
