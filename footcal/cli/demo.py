"""`footcal demo`: the whole job once on invented data, errors against the truth, and a report to look at."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from footcal.demo.run import DemoResult


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command(epilog="Example: footcal demo --out demo, then open demo/report.html")(demo)


def demo(
    out: Annotated[
        Path, typer.Option("--out", help="Folder for what the demo makes; files of the same names are replaced.")
    ] = Path("demo"),
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Calibrate four invented feet, fuse two walks, watch ten weeks of drift; print errors and write a report."""
    from footcal.cli.console import print_json, progress
    from footcal.demo.page import write_demo_report
    from footcal.demo.run import STAGES, run_demo
    from footcal.demo.tables import document

    with progress("reading", total=float(STAGES)) as done:
        result = run_demo(out, done)
        write_demo_report(result, out / "report.html")
    if json:
        print_json(document(result))
    else:
        _print(result)
    _say_next(result)


def _print(result: DemoResult) -> None:
    from footcal.cli.console import print_table
    from footcal.demo.tables import DRIFT_HEADER, FOOT_HEADER, WALK_HEADER, drift_rows, foot_rows, walk_rows

    print_table("Feet: error on another day, against the simulated truth", FOOT_HEADER, foot_rows(result), left=3)
    print_table("Walk: fused against the simulated truth", WALK_HEADER, walk_rows(result.walks))
    print_table("Drift after ten weeks", DRIFT_HEADER, drift_rows(result), left=4)


def _say_next(result: DemoResult) -> None:
    from footcal.cli.console import talk
    from footcal.report.page import CAUTION

    bad = ", ".join(verdict.foot_id for verdict in result.verdicts if verdict.needs_action) or "none"
    lines = (
        f"All data are invented. Feet that need action: {bad} (the demo makes one go bad on purpose; exit code 0).",
        f"open: {result.out / 'report.html'}",
        "next: footcal fit SESSION --out FOOT.cal.json --report report.html   (your own foot)",
        CAUTION,
    )
    for line in lines:
        talk().print(line)
