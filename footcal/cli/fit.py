"""`footcal fit`: bench sessions in, one calibration file out."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

if TYPE_CHECKING:
    from footcal.fit.engine import FitResult


def register(app: typer.Typer) -> None:
    """Add the command."""
    app.command(
        epilog="Example: footcal fit feet/SP-0031/sessions/2031-04-02 --out SP-0031.cal.json --report report.html"
    )(fit)


def fit(
    sessions: Annotated[list[Path], typer.Argument(help="Session folders of one foot.")],
    out: Annotated[Path, typer.Option("--out", help="Calibration file to write.")],
    report: Annotated[Path | None, typer.Option("--report", help="Write an HTML report as well.")] = None,
    foot: Annotated[str | None, typer.Option("--foot", help="Serial number, where session.toml has none.")] = None,
    kind: Annotated[str | None, typer.Option("--kind", help="cell, resistive, magnetic or capacitive.")] = None,
    capacity: Annotated[float | None, typer.Option("--capacity", help="Full scale, newtons.")] = None,
    raw_max: Annotated[float | None, typer.Option("--raw-max", help="Top of the converter, counts.")] = None,
    correct_mass: Annotated[
        list[str] | None,
        typer.Option("--correct-mass", metavar="STEP=KG", help="Mass to use for a step; SESSION:STEP=KG for several."),
    ] = None,
    swing: Annotated[
        Path | None, typer.Option("--swing", help="Log of a walk whose swings are fitted as zeros; give --leg as well.")
    ] = None,
    leg: Annotated[str | None, typer.Option("--leg", help="Leg that carried the foot in that log.")] = None,
    json: Annotated[bool, typer.Option("--json", help="Print one JSON document.")] = False,
) -> None:
    """Fit the sensor model of one foot to its bench sessions and write the calibration file."""
    from footcal.cli.console import print_json, progress, talk
    from footcal.files.session import read_session
    from footcal.files.session_meta import SessionDefaults
    from footcal.fit.correct_mass import parse_corrections
    from footcal.fit.engine import fit_sessions
    from footcal.fit.swing import read_swings

    defaults = SessionDefaults(foot_id=foot, kind=kind, capacity_N=capacity, raw_max=raw_max)
    corrections = parse_corrections(correct_mass or [])
    read = [read_session(folder, defaults) for folder in sessions]
    with progress("choosing terms") as done:

        def fitted() -> FitResult:
            return fit_sessions(
                read,
                on_try=lambda terms: done(0.0, f"trying {terms.words()}"),
                kind=kind,
                capacity_N=capacity,
                correct_mass=corrections,
            )

        result = fitted()
        if swing is not None:
            read.append(read_swings(result, swing, leg))
            result = fitted()
    result.calibration.save(out)
    if report is not None:
        from footcal.report.calibration import write_calibration_report

        write_calibration_report(result, report)
    if json:
        print_json(_document(result, out))
    else:
        _print(result)
        talk().print(f"written: {out}" + (f", {report}" if report else ""))
        talk().print(f"next: footcal convert {out} LOG --tare 3 --out force.parquet")


def _document(result: FitResult, out: Path) -> dict[str, Any]:
    file = result.calibration.file.model_dump(mode="json")
    kept = ("foot_id", "sensor", "set_aside", "figures", "validity", "clock_offset_s", "notes", "sha256")
    return {
        **{name: file[name] for name in kept},
        "dynamic": file["validity"]["dynamic"],
        "terms": result.best.fitted.terms.words(),
        "uncertainty_curve": file["uncertainty"]["curve"],
        "file": str(out),
    }


def _print(result: FitResult) -> None:
    from footcal.cli.console import out, print_table

    file = result.calibration.file
    curve = file.uncertainty.curve
    valid = file.validity
    rows = [
        ("foot", f"{file.foot_id} ({file.sensor.kind}, {file.sensor.capacity_N:g} N full scale)"),
        ("sessions", ", ".join(used.name for used in file.provenance.sessions)),
        ("fitted", result.best.fitted.terms.words()),
        ("left out: cycles / load levels / pump", " / ".join(_percent(v) for v in _figures(result))),
        ("U (k = 2) at zero / half / top", " / ".join(f"{curve[i].U_N:.3g} N" for i in (0, 5, 10))),
        (
            "valid",
            f"{valid.force_min_N:.0f} to {valid.force_max_N:.1f} N, {valid.temp_min_C:.0f} to {valid.temp_max_C:.0f} C",
        ),
        ("quick data fitted (dynamic)", "yes" if valid.dynamic else "no: do not trust it while walking"),
        ("steps set aside", f"{len(file.set_aside)} of {sum(s.holds for s in file.provenance.sessions)}"),
    ]
    print_table("Calibration", ("", ""), rows, left=2)
    for aside in file.set_aside:
        out().print(f"  {aside.session}, step {aside.step}: {aside.reason}")
    for note in file.notes:
        out().print(f"  note: {note}")


def _figures(result: FitResult) -> tuple[float | None, ...]:
    figures = result.calibration.file.figures
    return figures.cycles, figures.loads, figures.pump


def _percent(value: float | None) -> str:
    return "not tested" if value is None else f"{value:.3g} % FS"
