"""Steps brought to one form."""

from __future__ import annotations

import io

import numpy as np
import pandas as pd
import pytest

from footcal.errors import FileFormatError
from footcal.files.session_steps import normal_steps

HEAD = "step,cycle,direction,t_start_s,t_end_s,mass_kg,load_N,kind,void_of\n"


def steps(rows: str) -> pd.DataFrame:
    """Return the normal form of some rows, with readings from 0 to 100 s."""
    table = pd.read_csv(io.StringIO(HEAD + rows))
    return normal_steps(table, np.arange(0.0, 100.0, 0.1), lambda row: f"line {row + 2}")


def test_a_zero_just_after_a_load_is_quick_and_a_later_one_a_hold() -> None:
    """DESIGN §4: without `kind`, a zero that starts < 0.5 s after a load step ends is quick."""
    kinds = steps("1,1,up,0,5,2,,,\n2,1,zero,5.4,9,,,,\n3,1,up,10,15,2,,,\n4,1,zero,15.6,19,,,,\n")["kind"]
    assert kinds.to_list() == ["hold", "quick", "hold", "hold"]


def test_a_kind_that_is_given_stands() -> None:
    """The rule fills empty cells only."""
    assert steps("1,1,up,0,5,2,,press,\n2,1,zero,5.1,9,,,hold,\n")["kind"].to_list() == ["press", "hold"]


def test_an_undone_step_is_gone() -> None:
    """A row that only takes back removes both itself and the earlier one."""
    assert steps("1,1,up,0,5,2,,,\n2,1,up,6,9,3,,,\n,,,,,,,,2\n")["step"].to_list() == [1]


def test_a_step_done_again_stands_in_the_place_of_the_first() -> None:
    """A row that takes back and has a window of its own counts."""
    again = steps("1,1,up,0,5,2,,,\n2,1,up,6,9,3,,,\n3,1,up,10,14,4,,,2\n")
    assert again["mass_kg"].to_list() == [2.0, 4.0]


def test_a_load_that_is_not_known_may_be_left_out_of_a_pump_step() -> None:
    """The reference cell tells it."""
    assert steps("1,1,up,0,5,,,pump,\n")["kind"].to_list() == ["pump"]


def test_a_zero_step_has_no_load() -> None:
    """Its load is 0 N although nothing was written."""
    assert steps("1,1,zero,0,5,,,,\n")["load_N"].to_list() == [0.0]


@pytest.mark.parametrize(
    ("rows", "message"),
    [
        ("1,1,upp,0,5,2,,,\n", "line 2, column 'direction'.*'up' is meant"),
        ("1,1,up,0,5,2,,hodl,\n", "line 2, column 'kind'.*'hold' is meant"),
        ("1,1,up,5,5,2,,,\n", "line 2, column 't_end_s'"),
        ("1,1,up,5,9,2,,,\n2,1,up,1,3,3,,,\n", "line 3, column 't_start_s'.*backwards"),
        ("1,1,up,0,5,,,,\n", "line 2, column 'mass_kg'.*neither"),
        ("1,1,up,0,5,-2,,,\n", "line 2, column 'mass_kg'.*below 0"),
        ("1,1,up,0,5,inf,,,\n", "line 2, column 'mass_kg'.*infinite"),
        ("1,1,zero,0,5,2,,,\n", "line 2, column 'direction'.*carries a load"),
        ("1,-1,up,0,5,2,,,\n", "line 2, column 'cycle'"),
        ("1,1,up,,5,2,,,\n", "line 2, column 't_start_s'"),
        ("1,1,up,0,5,2,,,\n1,1,up,6,9,2,,,\n", "line 3, column 'step'.*twice"),
        ("1.5,1,up,0,5,2,,,\n", "line 2, column 'step'"),
        ("1,1,up,0,5,2,,,7\n", "line 2, column 'void_of'"),
        ("1,1,up,98,120,2,,,\n", "line 2, column 't_start_s'.*outside the readings"),
    ],
)
def test_a_wrong_step_is_refused_with_its_row(rows: str, message: str) -> None:
    """Row, column and what is wrong are named."""
    with pytest.raises(FileFormatError, match=message):
        steps(rows)


def test_a_step_in_a_gap_of_the_readings_is_refused() -> None:
    """A window that holds no reading can't be used."""
    table = pd.DataFrame({"step": [1.0], "cycle": [1.0], "direction": ["up"], "t_start_s": [20.0], "t_end_s": [30.0]})
    table["mass_kg"] = 1.0
    with pytest.raises(FileFormatError, match="gap"):
        normal_steps(table, np.array([0.0, 10.0, 40.0, 50.0]), lambda row: f"line {row + 2}")


def tilted(rows: str) -> pd.DataFrame:
    """Return the normal form of rows that may carry a tilt."""
    head = "step,cycle,direction,t_start_s,t_end_s,mass_kg,kind,tilt_x_deg,tilt_y_deg\n"
    return normal_steps(
        pd.read_csv(io.StringIO(head + rows)), np.arange(0.0, 100.0, 0.1), lambda row: f"line {row + 2}"
    )


def test_a_step_without_a_tilt_stands_level() -> None:
    """Empty cells and absent columns are 0 degrees."""
    table = tilted("1,1,up,0,5,2,,,\n2,1,up,6,9,2,tilted,15,\n")
    assert table["tilt_x_deg"].to_list() == [0.0, 15.0]
    assert table["tilt_y_deg"].to_list() == [0.0, 0.0]
    assert steps("1,1,up,0,5,2,,,\n")["tilt_x_deg"].to_list() == [0.0]


def test_a_step_with_a_tilt_and_no_kind_is_tilted() -> None:
    """A zero on the wedge just after a load is tilted too, not quick."""
    kinds = tilted("1,1,up,0,5,2,,,-30\n2,1,zero,5.2,9,,,,-30\n")["kind"]
    assert kinds.to_list() == ["tilted", "tilted"]


@pytest.mark.parametrize(
    ("rows", "message"),
    [
        ("1,1,up,0,5,2,hold,15,\n", "line 2, column 'tilt_x_deg'.*'hold' has a tilt"),
        ("1,1,up,0,5,2,tilted,,75\n", "line 2, column 'tilt_y_deg'.*beyond"),
        ("1,1,up,0,5,2,tilted,inf,\n", "line 2, column 'tilt_x_deg'.*beyond"),
    ],
)
def test_a_wrong_tilt_is_refused_with_its_row(rows: str, message: str) -> None:
    """Only tilted steps may lean, and not beyond 60 degrees."""
    with pytest.raises(FileFormatError, match=message):
        tilted(rows)
