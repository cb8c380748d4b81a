"""`footcal convert`: a raw log in, newtons with their standard uncertainty out."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command(
        epilog="Example: footcal convert SP-0031.cal.json raw.parquet --leg front_left --tare 3 --out force.parquet"
    )(convert)


def convert(
    calibration: Annotated[Path, typer.Argument(help="Calibration file of the foot.")],
    log: Annotated[Path, typer.Argument(help="Log: t_s, raw, temp_C, or the same with a leg's name before a dot.")],
    out: Annotated[Path, typer.Option("--out", help="File to write: .parquet, .csv or .csv.gz.")],
    leg: Annotated[str | None, typer.Option("--leg", help="Leg whose columns to take from a robot log.")] = None,
    tare: Annotated[float, typer.Option("--tare", help="Take the first seconds, unloaded and at rest, as zero.")] = 0.0,
    json: Annotated[bool, typer.Option("--json", help="Print a summary as one JSON document.")] = False,
) -> None:
    """Turn raw readings into newtons: columns t_s, force_N, u_N, flags; one row a row of the log."""
    from footcal.calfile import Calibration
    from footcal.calfile.convert import convert_log
    from footcal.cli.console import print_json, print_table, progress, talk

    with progress("converting", total=1.0) as done:
        summary = convert_log(Calibration.load(calibration), log, out, leg=leg, tare_s=tare, on_share=done)
    document = summary.document()
    if json:
        print_json(document)
        return
    flagged = ", ".join(f"{name} {count}" for name, count in document["flags"].items()) or "none"
    rows = [
        ("foot", document["foot_id"]),
        ("samples", f"{document['samples']}"),
        ("force, lowest / mean / highest", " / ".join(f"{document[k]:.2f} N" for k in ("min_N", "mean_N", "max_N"))),
        ("standard uncertainty, median / highest", f"{document['u_median_N']:.3g} / {document['u_max_N']:.3g} N"),
        ("tare", f"{document['tare_raw']:.4g} counts ({document['tare_N']:.3g} N)" if tare else "none"),
        ("samples flagged", flagged),
    ]
    print_table("Converted", ("", ""), rows, left=2)
    talk().print(f"written: {out}")
