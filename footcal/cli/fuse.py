"""`footcal fuse`: a robot log in, contact and ground reaction force of every leg out."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Annotated

import typer


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command(epilog="Example: footcal fuse --robot robot.toml --from walk.parquet --to estimate.parquet")(fuse)


def fuse(
    robot: Annotated[Path, typer.Option("--robot", help="Robot description (robot.toml).")],
    source: Annotated[Path, typer.Option("--from", help="Robot log: .parquet, .csv or .csv.gz.")],
    sink: Annotated[str, typer.Option("--to", help="File to write (.parquet, .csv), or - for JSON lines.")],
) -> None:
    """Fuse foot sensors and motor currents of a log; one estimate a row, the same code that runs live."""
    from footcal.cli.console import print_table, progress, talk
    from footcal.fusion.engine import Fusion
    from footcal.fusion.runs import fuse_to_file, fuse_to_lines

    with progress("fusing") as done:
        fusion = Fusion.load(robot)
        if sink == "-":
            fuse_to_lines(fusion, source, sys.stdout.buffer, done)
            return
        summary = fuse_to_file(fusion, source, sink, done)
    rows = [(leg, str(summary.contacts[leg]), ", ".join(words) or "good") for leg, words in summary.health.items()]
    print_table(f"Fused {summary.duration_s:.1f} s, {summary.rows} rows", ("leg", "touchdowns", "health"), rows)
    if summary.dropped:
        talk().print(f"{summary.dropped} rows were no later than the row before: dropped, the last estimate repeated")
    talk().print(f"written: {sink}")
