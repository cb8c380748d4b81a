"""`footcal fit` and `footcal convert` as they are typed: exit codes, what is printed where, and bad input."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pytest

from footcal.cli.main import run
from footcal.files.session import read_session, write_session
from footcal.recipe.data import data_dir

FOOT = data_dir("calib_data") / "LC-0417" / "session"
WALK = data_dir("calib_data") / "walk"


def called(*words: str | Path) -> int:
    """Run the command line and return its exit code."""
    with pytest.raises(SystemExit) as stop:
        run([str(word) for word in words])
    return int(stop.value.code or 0)


@pytest.fixture(scope="module")
def plain(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The demo foot's session as plain CSV, to be spoilt."""
    folder = tmp_path_factory.mktemp("plain") / "session"
    write_session(read_session(FOOT), folder)
    return folder


def spoilt(plain: Path, folder: Path, member: str, change: Callable[[list[str]], list[str]]) -> Path:
    """A copy of the session with one file's lines changed."""
    folder.mkdir()
    for path in plain.iterdir():
        lines = path.read_text(encoding="utf-8").splitlines()
        (folder / path.name).write_text("\n".join(change(lines) if path.name == member else lines) + "\n", "utf-8")
    return folder


def test_fit_writes_a_file_and_prints_its_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit 0; the table goes to stdout, what was written to stderr."""
    out = tmp_path / "a.cal.json"
    assert called("fit", FOOT, "--out", out) == 0
    printed = capsys.readouterr()
    assert "LC-0417" in printed.out
    assert "written" in printed.err
    assert out.exists()


def test_fit_json_is_one_document_with_the_agreed_keys(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """DESIGN 4, machine output: set_aside, figures, dynamic, clock_offset_s."""
    assert called("fit", FOOT, "--out", tmp_path / "a.cal.json", "--json") == 0
    document = json.loads(capsys.readouterr().out)
    assert document["foot_id"] == "LC-0417"
    assert set(document["figures"]) == {"cycles", "loads", "pump"}
    assert document["dynamic"] is True
    assert {"set_aside", "clock_offset_s"} <= set(document)


def test_convert_takes_a_leg_of_a_robot_log(tmp_path: Path) -> None:
    """Exit 0 and one row out for each row in."""
    out = tmp_path / "force.parquet"
    assert called("convert", WALK / "LC-0417.cal.json", WALK / "log.parquet", "--leg", "front_left", "--out", out) == 0
    assert len(pd.read_parquet(out)) == len(pd.read_parquet(WALK / "log.parquet", columns=["t_s"]))


SPOILERS: list[tuple[str, str, Callable[[list[str]], list[str]], str]] = [
    ("missing column", "readings.csv", lambda x: [x[0].replace("raw", "counts"), *x[1:]], "column 'raw' is missing"),
    ("text in a number", "readings.csv", lambda x: [*x[:99], "4.0,abc,22.0", *x[100:]], "line 100"),
    ("time backwards", "readings.csv", lambda x: [*x[:199], "0.001,7,22.0", *x[200:]], "time runs backwards"),
    ("empty cell", "readings.csv", lambda x: [*x[:99], x[99].split(",")[0] + ",,22.0", *x[100:]], "line 100"),
    ("NaN", "readings.csv", lambda x: [*x[:99], x[99].split(",")[0] + ",nan,22.0", *x[100:]], "line 100"),
    ("empty file", "readings.csv", lambda _: [], "empty"),
    ("one load only", "steps.csv", lambda x: x[:3], "load only"),
    (
        "a step outside the readings",
        "steps.csv",
        lambda x: [x[0], *[moved(line) for line in x[1:]]],
        "outside the readings",
    ),
    (
        "a word that is no direction",
        "steps.csv",
        lambda x: [x[0], x[1].replace("zero", "sideways"), *x[2:]],
        "sideways",
    ),
    ("steps without a needed column", "steps.csv", lambda x: [x[0].replace("t_end_s", "end"), *x[1:]], "t_end_s"),
]


def moved(line: str) -> str:
    """A step row an hour later."""
    cells = line.split(",")
    cells[3], cells[4] = str(float(cells[3]) + 36_000.0), str(float(cells[4]) + 36_000.0)
    return ",".join([*cells[:9], "", *cells[10:]])


@pytest.mark.parametrize(("what", "member", "change", "words"), SPOILERS, ids=[one[0] for one in SPOILERS])
def test_a_bad_session_is_refused_with_exit_code_2(
    what: str,
    member: str,
    change: Callable[[list[str]], list[str]],
    words: str,
    plain: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
) -> None:
    """The message says what and where; nothing is written."""
    folder = spoilt(plain, tmp_path / "bad", member, change)
    assert called("fit", folder, "--out", tmp_path / "a.cal.json") == 2, what
    assert words in capsys.readouterr().err
    assert [path.name for path in tmp_path.iterdir()] == ["bad"]


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["fit"], "Missing argument"),
        (["fit", "nowhere", "--out", "x.json"], "no such session folder"),
        (["frob"], "No such command"),
        (["convert", "nowhere.json", "log.parquet", "--out", "x.parquet"], "nowhere.json"),
    ],
)
def test_bad_use_says_what_is_wrong(words: list[str], said: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit code 2 and one line."""
    assert called(*words) == 2
    assert said in capsys.readouterr().err


def test_every_command_has_an_example_in_its_help(capsys: pytest.CaptureFixture[str]) -> None:
    """`--help` of each command shows how it is called."""
    for command in ("fit", "convert", "fuse", "score", "demo"):
        assert called(command, "--help") == 0
        assert f"footcal {command}" in capsys.readouterr().out
