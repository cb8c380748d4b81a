"""The folder of a bench session."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from footcal.errors import FileFormatError, FootcalError, SessionError, SettingError
from footcal.files.columns import ColumnRule
from footcal.files.session import Session, read_session, session_from_tables, write_session
from footcal.files.session_meta import SessionDefaults, SessionMeta

STEPS = "step,cycle,direction,t_start_s,t_end_s,mass_kg,load_N\n1,1,zero,0,2,,\n2,1,up,3,5,1,\n3,1,up,6,8,,19.6\n"


def made(folder: Path, *, readings: str | None = None, steps: str | None = STEPS, toml: str | None = None) -> Path:
    """Write a session of 30 s at 10 Hz; any part can be another text, or left out."""
    folder.mkdir(exist_ok=True)
    rows = "".join(f"{k / 10:g},{100 + k},20.5\n" for k in range(300))
    (folder / "readings.csv").write_text(readings if readings is not None else "t_s,raw,temp_C\n" + rows)
    if steps is not None:
        (folder / "steps.csv").write_text(steps)
    if toml is not None:
        (folder / "session.toml").write_text(toml)
    return folder


def full_session() -> Session:
    """Return a session that has every part."""
    t_s = np.arange(300) / 10
    readings = pd.DataFrame({"t_s": t_s, "raw": 7 * t_s, "temp_C": 20 + t_s, "ref_N": np.where(t_s > 1, t_s, np.nan)})
    steps = pd.DataFrame(
        {
            "step": [1, 2],
            "cycle": [1, 1],
            "direction": ["zero", "up"],
            "t_start_s": [0.0, 3.0],
            "t_end_s": [2.0, 5.0],
            "mass_kg": [np.nan, 1.0],
            "note": ["", "a, b"],
        }
    )
    meta = SessionMeta(
        foot_id="SP-0031",
        kind="resistive",
        capacity_N=250.0,
        mount="foot_down",
        mass_below_sensor_kg=0.1,
        weights=({"name": "W1", "nominal_kg": 1.0, "class": "M1"},),
        start_utc=dt.datetime(2031, 4, 2, 9, 30, tzinfo=dt.UTC),
        closed=True,
    )
    return session_from_tables(
        meta, readings, steps, reference=pd.DataFrame({"t_ref_s": [0.0, 0.5], "ref_N": [1.0, 2.0]})
    )


@pytest.mark.parametrize("suffix", [".csv", ".csv.gz", ".parquet"])
def test_a_session_comes_back_as_it_was_written(tmp_path: Path, suffix: str) -> None:
    """Every array, step and word survives each form of file."""
    session = full_session()
    write_session(session, tmp_path / "s", suffix)
    back = read_session(tmp_path / "s")
    assert back.meta == session.meta
    pd.testing.assert_frame_equal(back.steps, session.steps)
    assert back.reference is not None
    assert session.reference is not None
    for ours, theirs in zip(
        (back.t_s, back.raw, back.temp_C, back.ref_N, *back.reference),
        (session.t_s, session.raw, session.temp_C, session.ref_N, *session.reference),
        strict=True,
    ):
        np.testing.assert_array_equal(ours, theirs)


def test_two_files_of_columns_are_enough(tmp_path: Path) -> None:
    """Without session.toml the identity stays unknown, and options can give it."""
    folder = made(tmp_path / "s")
    assert read_session(folder).meta == SessionMeta()
    filled = read_session(folder, SessionDefaults(foot_id="F1", kind="cell", capacity_N=500.0, raw_max=4095.0)).meta
    assert (filled.foot_id, filled.kind, filled.capacity_N, filled.raw_max) == ("F1", "cell", 500.0, 4095.0)


def test_an_option_that_contradicts_the_session_is_refused(tmp_path: Path) -> None:
    """The foot of the option is not the foot of the session."""
    folder = made(tmp_path / "s", toml='foot_id = "F1"\n')
    with pytest.raises(SettingError, match=r"'F1'.*'F2'"):
        read_session(folder, SessionDefaults(foot_id="F2"))


def test_a_pump_recording_needs_no_steps(tmp_path: Path) -> None:
    """Readings with a reference cell stand alone; there are then no steps."""
    folder = made(tmp_path / "s", readings="t_s,raw,ref_N\n0,1,2\n1,2,\n", steps=None)
    session = read_session(folder)
    np.testing.assert_array_equal(session.ref_N, [2.0, np.nan])
    assert len(session.steps) == 0


def test_neither_steps_nor_a_reference_is_refused(tmp_path: Path) -> None:
    """Then no load is known."""
    with pytest.raises(SessionError, match=r"steps\.csv"):
        read_session(made(tmp_path / "s", steps=None))


def test_a_thermometer_at_its_own_rate_is_interpolated(tmp_path: Path) -> None:
    """By hand: half-way between 20 °C at 0 s and 30 °C at 10 s are 25 °C at 5 s."""
    folder = made(tmp_path / "s")
    (folder / "temperature.csv").write_text("t_s,temp_C\n0,20\n10,30\n")
    assert read_session(folder).temp_C[50] == pytest.approx(25.0, abs=1e-12)


def test_without_a_thermometer_temperature_is_nan(tmp_path: Path) -> None:
    """No value is made up."""
    session = read_session(made(tmp_path / "s", readings="t_s,raw,ref_N\n0,1,2\n1,2,3\n", steps=None))
    assert np.isnan(session.temp_C).all()


def test_a_gap_starts_a_new_set(tmp_path: Path) -> None:
    """61 s without readings part two sets; 59 s do not."""
    readings = "t_s,raw,ref_N\n0,1,0\n59,1,0\n120,1,0\n121,1,0\n"
    session = read_session(made(tmp_path / "s", readings=readings, steps=None))
    assert session.set_of(session.t_s).tolist() == [0, 0, 1, 1]


def test_several_raw_columns_are_channels(tmp_path: Path) -> None:
    """raw0 and raw1 become two columns, in the order of their numbers."""
    session = read_session(made(tmp_path / "s", readings="t_s,raw1,raw0,ref_N\n0,1,2,0\n", steps=None))
    assert session.raw.tolist() == [[2.0, 1.0]]


def test_rules_rename_the_readings(tmp_path: Path) -> None:
    """`[columns]` of the recipe brings other names and units."""
    folder = made(tmp_path / "s", readings="ms,adc,ref_N\n0,5,0\n500,6,1\n", steps=None)
    rules = {"t_s": ColumnRule("ms", 0.001), "raw": ColumnRule("adc")}
    session = read_session(folder, SessionDefaults(columns=rules))
    assert session.t_s.tolist() == [0.0, 0.5]
    assert session.raw.tolist() == [5.0, 6.0]


def test_the_digest_tells_the_content_not_the_folder(tmp_path: Path) -> None:
    """A copy has the same digest; one changed cell gives another."""
    one, two = read_session(made(tmp_path / "a")), read_session(made(tmp_path / "b"))
    other = read_session(made(tmp_path / "c", steps=STEPS.replace("19.6", "19.7")))
    assert one.digest == two.digest != other.digest


BAD: dict[str, tuple[Callable[[Path], object], str]] = {
    "no folder": (lambda f: f, "no such session folder"),
    "no readings": (lambda f: made(f).joinpath("readings.csv").unlink(), r"no readings\.csv"),
    "two readings": (lambda f: (made(f) / "readings.csv.gz").touch(), "both readings.csv and"),
    "no raw": (lambda f: made(f, readings="t_s,rawx\n0,1\n"), "'raw' is missing"),
    "text": (lambda f: made(f, readings="t_s,raw\n0,1\n1,x\n"), "line 3, column 'raw'"),
    "NaN": (lambda f: made(f, readings="t_s,raw\n0,1\n1,nan\n"), "line 3, column 'raw'"),
    "backwards": (lambda f: made(f, readings="t_s,raw\n0,1\n2,1\n1,1\n"), "line 4.*backwards"),
    "empty": (lambda f: made(f, readings=""), "empty"),
    "outside": (lambda f: made(f, steps=STEPS + "4,1,up,40,50,3,\n"), "line 5.*step 4.*outside the readings"),
    "no load column": (
        lambda f: made(f, steps="step,cycle,direction,t_start_s,t_end_s\n1,1,up,0,1\n"),
        "neither column 'mass_kg' nor",
    ),
    "toml": (lambda f: made(f, toml="foot_id = \n"), "line 1"),
    "kind": (lambda f: made(f, toml='kind = "piezo"\n'), "'piezo' is not one of cell"),
    "capacity": (lambda f: made(f, toml="capacity_N = -5\n"), "capacity_N: -5 is not a number above 0"),
    "slip": (lambda f: made(f, toml="capacity_n = 5\n"), "Write 'capacity_N'"),
    "start": (lambda f: made(f, toml='start_utc = "spring"\n'), "start_utc"),
    "closed": (lambda f: made(f, toml='closed = "yes"\n'), "true or false"),
}


@pytest.mark.parametrize("case", BAD)
def test_bad_input_is_refused_with_its_place(tmp_path: Path, case: str) -> None:
    """Each fault of a session is met by one of our errors that says where it stands."""
    make, message = BAD[case]
    make(tmp_path / "s")
    with pytest.raises(FileFormatError, match=message):
        read_session(tmp_path / "s")


def test_a_session_file_cut_anywhere_never_fails_in_another_way(tmp_path: Path) -> None:
    """session.toml and steps.csv, cut at every byte: a session or one of our errors."""
    folder = tmp_path / "s"
    write_session(full_session(), folder)
    refused = 0
    for name in ("session.toml", "steps.csv"):
        whole = (folder / name).read_bytes()
        for size in range(0, len(whole), 3):
            (folder / name).write_bytes(whole[:size])
            try:
                read_session(folder)
            except FootcalError:
                refused += 1
        (folder / name).write_bytes(whole)
    assert refused > 20  # most cuts fall inside a row or a value


def test_keys_of_others_are_kept(tmp_path: Path) -> None:
    """What we don't know in session.toml survives reading and writing."""
    session = read_session(made(tmp_path / "s", toml="bench_no = 3\n[air]\ntemp_C = 21.5\n"))
    write_session(session, tmp_path / "t")
    assert read_session(tmp_path / "t").meta.extra == {"bench_no": 3, "air": {"temp_C": 21.5}}


def test_a_start_with_an_offset_is_turned_into_utc(tmp_path: Path) -> None:
    """By hand: 11:30 two hours east of Greenwich is 09:30 UTC."""
    session = read_session(made(tmp_path / "s", toml="start_utc = 2031-04-02T11:30:00+02:00\n"))
    assert session.meta.start_utc == dt.datetime(2031, 4, 2, 9, 30, tzinfo=dt.UTC)
