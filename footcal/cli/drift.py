"""`footcal drift`: check sessions into the history, and the verdict on each foot out of it."""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from collections.abc import Sequence

    from footcal.drift.records import NewCheck
    from footcal.drift.verdict import FootVerdict

History = Annotated[Path, typer.Option("--history", help="The history, an SQLite file.")]

drift = typer.Typer(help="Watch feet drift over weeks.", no_args_is_help=True, rich_markup_mode="rich")


def register(app: typer.Typer) -> None:
    """Add the commands."""
    app.add_typer(drift, name="drift")


@drift.command(
    epilog="Example: footcal drift add week_01 --cal SP-0031.cal.json --state as-found --history drift.sqlite"
)
def add(
    sessions: Annotated[list[Path], typer.Argument(help="Check session folders of one foot.")],
    cal: Annotated[Path, typer.Option("--cal", help="Calibration file of that foot.")],
    state: Annotated[str, typer.Option("--state", help="as-found (before adjusting) or as-left (after).")],
    history: History,
    foot: Annotated[str | None, typer.Option("--foot", help="Serial number, where session.toml has none.")] = None,
    date: Annotated[
        dt.datetime | None, typer.Option("--date", help="When it was checked, UTC, where session.toml does not say.")
    ] = None,
    limit_span_pct: Annotated[float | None, typer.Option(help="Largest change of span, per cent.")] = None,
    limit_zero_pct: Annotated[float | None, typer.Option(help="Largest shift of zero, per cent of full scale.")] = None,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Score check sessions against the calibration and add them to the history, all of them or none."""
    from footcal.calfile import Calibration
    from footcal.cli.console import talk
    from footcal.drift.history import History as Store
    from footcal.drift.limits import drift_limits
    from footcal.drift.scoring import read_checks

    calibration = Calibration.load(cal)
    limits = drift_limits(calibration.kind, calibration.capacity_N, span_pct=limit_span_pct, zero_pct_FS=limit_zero_pct)
    moment = None if date is None else date.replace(tzinfo=dt.UTC)
    checks = read_checks(sessions, calibration, state, limits=limits, foot_id=foot, t_utc=moment)
    with Store(history) as store:
        new = store.add(checks)
    _print_added(checks, new, json=json)
    talk().print(f"added {sum(new)} of {len(new)} to {history}; next: footcal drift show --history {history}")


@drift.command(epilog="Exit code 1: a foot needs action. Example: footcal drift show --history drift.sqlite --json")
def show(
    history: History,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Print the verdict on every foot, the worst first."""
    from footcal.cli.console import print_json
    from footcal.drift.history import History as Store
    from footcal.drift.verdict import fleet_verdicts

    with Store(history, create=False) as store:
        verdicts = fleet_verdicts(store.checks())
    if json:
        print_json({"feet": [verdict.as_json() for verdict in verdicts]})
    else:
        _print_verdicts(verdicts)
    if any(verdict.needs_action for verdict in verdicts):
        raise typer.Exit(1)


def _print_added(checks: Sequence[NewCheck], new: Sequence[bool], *, json: bool) -> None:
    from dataclasses import asdict

    from footcal.cli.console import print_json, print_table

    if json:
        rows = [
            {"session": check.session_name, "state": check.state, "new": fresh, **asdict(check.score)}
            for check, fresh in zip(checks, new, strict=True)
        ]
        print_json({"checks": rows})
        return
    print_table(
        f"Checks of foot {checks[0].score.foot_id}, {checks[0].state} (± expanded uncertainty, k = 2)",
        ("session", "", "zero N", "±", "span %", "±", "loop N", "noise N", "E_n"),
        [
            (
                *(check.session_name, "new" if fresh else "known"),
                *(f"{check.score.zero_N:+.2f}", f"{2 * check.score.zero_u_N:.2f}"),
                *(f"{check.score.span_pct:+.2f}", f"{2 * check.score.span_u_pct:.2f}"),
                *(f"{check.score.loop_N:.2f}", f"{check.score.noise_N:.3f}"),
                f"{max((load.en for load in check.score.loads), key=abs):+.2f}",
            )
            for check, fresh in zip(checks, new, strict=True)
        ],
        left=2,
    )


def _print_verdicts(verdicts: Sequence[FootVerdict]) -> None:
    from footcal.cli.console import out, print_table

    print_table(
        "Drift, the worst foot first",
        ("foot", "verdict", "zero N", "span %", "out", "last check"),
        [
            (
                *(verdict.foot_id, verdict.text, f"{verdict.zero_N:+.2f}", f"{verdict.span_pct:+.2f}"),
                *(f"{100 * verdict.p_out:.0f} %", verdict.last_check.isoformat()),
            )
            for verdict in verdicts
        ],
        left=2,
    )
    for verdict in verdicts:
        if verdict.needs_action:
            out().print(f"  {verdict.foot_id}: {verdict.reason}; seen since {verdict.since}{_interval(verdict)}.")


def _interval(verdict: FootVerdict) -> str:
    if verdict.due is None or verdict.due <= verdict.last_check:
        return ""
    return f"; outside between {verdict.due_lo} and {verdict.due_hi or 'later'} (80 %)"
