"""The report of one calibration: what was done, what was found, how far to trust it, and what was left out."""

from __future__ import annotations

import os

import numpy as np

from footcal.calfile.schema import CrossAxis, Zero
from footcal.fit.outcome import FitResult
from footcal.report.calibration_pictures import budget_picture, curve_pictures, error_pictures, trust_pictures
from footcal.report.page import CAUTION, Page, Section, Table, write_page
from footcal.report.points import HoldPoints, hold_points
from footcal.report.words import decimals, mean_of, moment, number, percent_FS

KIND_WORDS = {
    "cell": "load cell",
    "resistive": "squash pad, resistive",
    "magnetic": "squash pad, magnetic",
    "capacitive": "squash pad, capacitive",
}


def write_calibration_report(result: FitResult, path: str | os.PathLike[str]) -> None:
    """Write the report of a fit as one self-contained HTML file.

    Args:
        result: of `footcal.fit.engine.fit_sessions`.
        path: the file to write, whole or not at all.

    Raises:
        SettingError: the place can't be written.
    """
    write_page(calibration_page(result), path)


def calibration_page(result: FitResult) -> Page:
    """Return the report of a fit as a page."""
    file, points = result.calibration.file, hold_points(result)
    curve, valid = file.uncertainty.curve, file.validity
    middle, top = curve[len(curve) // 2], curve[-1]
    dynamic = "quick data were fitted" if valid.dynamic else "slow holds only: do not trust it while walking"
    return Page(
        title=f"Calibration of foot {file.foot_id}",
        kicker=f"{KIND_WORDS[file.sensor.kind]}, {file.sensor.capacity_N:g} N full scale",
        lead=(
            f"{len(points.load_N)} settled holds fitted, {len(result.asides)} set aside. "
            f"Valid from {valid.force_min_N:.0f} to {valid.force_max_N:.1f} N "
            f"and {valid.temp_min_C:.0f} to {valid.temp_max_C:.0f} °C; {dynamic}."
        ),
        figures=(
            (f"U (k = 2) at {middle.force_N:.0f} N", f"±{middle.U_N:.3g} N"),
            (f"U (k = 2) at {top.force_N:.0f} N", f"±{top.U_N:.3g} N"),
            ("cycles left out, RMS", percent_FS(file.figures.cycles)),
            ("loads left out, RMS", percent_FS(file.figures.loads)),
            ("pump left out, RMS", percent_FS(file.figures.pump)),
        ),
        sections=(
            _identity(result),
            _result(result, points),
            _errors(result, points),
            _trust(result, points),
            _left_aside(result),
            _notes(result),
        ),
        cautions=_cautions(result),
        invented=any("invented" in session.meta.extra for session in result.data.sessions),
        footer=(
            f"Calibration file, SHA-256 {file.sha256}.",
            f"Made {moment(file.provenance.made_utc)} by footcal {file.provenance.tool_version}.",
        ),
    )


def _identity(result: FitResult) -> Section:
    file, place = result.calibration.file, result.data.place
    gravity = f"{place.gravity_m_per_s2:.5f} ± {place.gravity_u_m_per_s2:.2g} m/s²"
    mount = f"{_mount(file.zero)}, {file.zero.mass_below_sensor_kg:g} kg below the sensor"
    limit_N = file.sensor.safe_limit_N
    rows = tuple(
        (used.name, moment(used.start_utc), used.operator or "–", f"{used.samples}", f"{used.holds}", used.sha256[:16])
        for used in file.provenance.sessions
    )
    return Section(
        "Identity and conditions",
        facts=(
            ("Foot", file.foot_id),
            ("Sensor", f"{KIND_WORDS[file.sensor.kind]}, {file.sensor.capacity_N:g} N full scale"),
            ("Safe limit", "not stated" if limit_N is None else f"{limit_N:g} N: never load the foot above it"),
            ("Side load", _side_load(file.model.cross_axis)),
            ("Zero", f"stated for a {file.zero.stated_for}; mount {mount}"),
            ("Local gravity", gravity),
            ("Temperature", f"{file.validity.temp_min_C:g} to {file.validity.temp_max_C:g} °C in the windows"),
            ("Recipe", next((used.recipe for used in file.provenance.sessions if used.recipe), None) or "not stated"),
            ("Weights", next((u.weights for u in file.provenance.sessions if u.weights), None) or "not stated"),
        ),
        tables=(
            Table(
                "Sessions",
                ("session", "start", "operator", "samples", "holds", "SHA-256, first 16"),
                rows,
                left=(0, 1, 2, 5),
            ),
        ),
    )


def _result(result: FitResult, points: HoldPoints) -> Section:
    terms = result.best.fitted.terms
    return Section(
        "What was fitted",
        words=(
            f"Terms that earned their place: {terms.words()}.",
            "A term stays only if it lowers the error on data left out of the fit by more than 3 %.",
        ),
        pictures=curve_pictures(result, points),
    )


def _errors(result: FitResult, points: HoldPoints) -> Section:
    return Section(
        "What is left over",
        words=("Error is reading less load, mean over each settled window, after all terms.",),
        pictures=error_pictures(result, points),
        tables=(_table_of_points(result, points),),
    )


def _table_of_points(result: FitResult, points: HoldPoints) -> Table:
    """Return the errors by tenths of full scale, zero apart."""
    full_N = result.data.capacity_N
    tenth = np.where(points.of("zero"), -1, np.clip(points.load_N // (0.1 * full_N), 0, 9))
    form = f"+z.{decimals(full_N)}f"
    rows = []
    for value in np.unique(tenth):
        mine = tenth == value
        up, down, error_N = mine & ~points.of("down"), mine & points.of("down"), points.after_N[mine]
        load_N = float(points.load_N[mine].mean())
        U_N = 2.0 * float(result.calibration.u_static_N(np.array([load_N]))[0])
        rows.append(
            (
                "zero" if value < 0 else f"{10 * value:.0f} to {10 * value + 10:.0f} % FS",
                *(f"{load_N:.1f}", f"{int(mine.sum())}"),
                *(number(mean_of(points.after_N[way]), form) for way in (up, down)),
                *(number(float(np.sqrt(np.mean(error_N**2))), form[1:]), number(np.abs(error_N).max(), form[1:])),
                number(U_N, form[1:]),
            )
        )
    header = ("range", "mean load, N", "holds", "loading, N", "unloading, N", "RMS, N", "largest, N", "U (k = 2), N")
    return Table("Errors by load: means, loading and unloading apart", header, tuple(rows))


def _trust(result: FitResult, points: HoldPoints) -> Section:
    lines = result.calibration.file.uncertainty.budget
    rows = tuple((line.source, f"{line.u_N:.2g}", line.kind, line.basis) for line in lines)
    return Section(
        "Uncertainty",
        words=("Evaluated in the sense of the GUM; U is twice the standard uncertainty, about 95 %.",),
        pictures=(*trust_pictures(result, points), budget_picture(lines)),
        tables=(Table("Budget at the top load", ("source", "u, N", "type", "basis"), rows, left=(0, 2, 3)),),
    )


def _left_aside(result: FitResult) -> Section:
    found = result.calibration.file.set_aside
    if not found:
        return Section("Set aside", words=("Nothing: every step fits the rest.",))
    rows = tuple(
        (aside.session, f"{aside.step}", aside.reason, number(aside.entered_kg, ".6g"), number(aside.fits_kg, ".3f"))
        for aside in found
    )
    return Section(
        "Set aside",
        words=("These steps were not fitted. Look at each: a wrong mass, a bump and a slipping pan look different.",),
        tables=(
            Table(
                "Steps set aside",
                ("session", "step", "reason", "entered, kg", "reading fits, kg"),
                rows,
                left=(0, 1, 2),
            ),
        ),
    )


def _side_load(cross: CrossAxis) -> str:
    if not cross.tested:
        return "not tested along both axes, stated default"
    return (
        f"{100.0 * cross.x:+.2f} % of a load along sensor x and {100.0 * cross.y:+.2f} % along y read as axial "
        f"(standard uncertainty {100.0 * cross.u_x:.2f} % and {100.0 * cross.u_y:.2f} %)"
    )


def _mount(zero: Zero) -> str:
    if zero.mount == "angle":
        return f"{np.degrees(zero.mount_angle_rad or 0.0):.1f}° from straight up"
    return zero.mount or "not stated"


def _notes(result: FitResult) -> Section:
    notes = result.notes or ("nothing to note",)
    return Section("Notes", words=tuple(f"{note[:1].upper()}{note[1:]}." for note in notes))


def _cautions(result: FitResult) -> tuple[str, ...]:
    file = result.calibration.file
    found = [CAUTION]
    if not file.validity.dynamic:
        found.append("Only slow holds were fitted: readings while walking were never tested on this foot.")
    if not file.model.cross_axis.tested:
        share = 100.0 * max(file.model.cross_axis.u_x, file.model.cross_axis.u_y)
        found.append(f"Side loads were not tested: {share:g} % of any side load is taken as uncertainty.")
    found.append(f"Outside {file.validity.force_min_N:.0f} to {file.validity.force_max_N:.1f} N nothing was tested.")
    return tuple(found)
