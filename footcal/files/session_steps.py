"""The steps of a bench session, brought to one form: kinds filled in, undone rows removed, every figure checked.

Tilt: `tilt_x_deg` and `tilt_y_deg` say how the foot was turned, right-handed about the sensor's x and y axes (about x
first, then about the foot's own y), out of the posture in which the load acts along the sensor's axis. The sensor's z
points from the sole to the leg, x and y are those of `footcal.leg.constants.sensor_frame`. A load of W newtons then
presses with W (-cos a sin b, sin a, cos a cos b) along x, y and z; a is the turn about x, b that about y.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np
import pandas as pd

from footcal.errors import FileFormatError
from footcal.files.places import near
from footcal.records import FloatArray

TEXT_COLUMNS: Final = ("direction", "kind", "series", "note")
REQUIRED_COLUMNS: Final = ("step", "cycle", "direction", "t_start_s", "t_end_s")
TILT_COLUMNS: Final = ("tilt_x_deg", "tilt_y_deg")
COLUMNS: Final = (*REQUIRED_COLUMNS, "mass_kg", "load_N", "kind", "series", "t_load_s", "note", *TILT_COLUMNS)
DIRECTIONS: Final = ("zero", "up", "down")
KINDS: Final = ("press", "hold", "quick", "pump", "knock", "swap", "tilted")
LOADED_KINDS: Final = ("press", "hold", "quick", "tilted")  # of these the load must be known
MOST_TILT_deg: Final = 60.0
QUICK_WITHIN_s: Final = 0.5  # a zero that starts sooner after a load was whisked off

Place = Callable[[int], str]  # row from 0 -> words for where it stands


def no_steps() -> pd.DataFrame:
    """Return the steps of a recording without any: no rows, the usual columns."""
    return _typed(pd.DataFrame({name: np.zeros(0) for name in COLUMNS}))


def normal_steps(table: pd.DataFrame, t_s: FloatArray, place: Place) -> pd.DataFrame:
    """Return the steps that count, in order of time, with every column of `COLUMNS` and a plain index.

    A row with `void_of` takes back the row of that step number; if it has a time window itself, it stands instead.
    An empty `kind` becomes `tilted` where a tilt is given, `quick` for a zero that starts < 0.5 s after a load step
    ends, else `hold`. `t_load_s` is `t_start_s` where it was not recorded; a zero step has `load_N` 0 and no mass; an
    empty tilt is 0.

    Args:
        table: what `steps.csv` holds; `REQUIRED_COLUMNS` and one of mass_kg, load_N must be there.
        t_s: times of the readings, shape (n,), seconds; each step's window must hold some of them.
        place: gives the words for a row in messages.

    Raises:
        FileFormatError: names the row whose value is wrong or whose window lies outside the readings.
    """
    table = _with_all_columns(table)
    table["row"] = np.arange(len(table))
    table = _without_voided(table, place).reset_index(drop=True)
    rows = table.pop("row").to_numpy()

    def refuse_if(bad: np.ndarray, column: str, what: Callable[[int], str], mend: str) -> None:
        if bad.any():
            index = int(np.argmax(bad))
            raise FileFormatError(where=f"{place(int(rows[index]))}, column {column!r}", what=what(index), mend=mend)

    table["direction"] = _known_words(table["direction"], "direction", DIRECTIONS, refuse_if)
    _check_numbers(table, refuse_if)
    table["t_load_s"] = table["t_load_s"].fillna(table["t_start_s"])
    for name in TILT_COLUMNS:
        table[name] = table[name].fillna(0.0)
    table["kind"] = _known_words(_filled_kinds(table), "kind", KINDS, refuse_if)
    _check_loads(table, refuse_if)
    _check_tilts(table, refuse_if)
    _check_inside(table, t_s, refuse_if)
    zero = table["direction"].to_numpy() == "zero"
    table.loc[zero, "load_N"] = table.loc[zero, "load_N"].fillna(0.0)
    return _typed(table[list(COLUMNS)])


def _with_all_columns(table: pd.DataFrame) -> pd.DataFrame:
    columns: dict[str, object] = {}
    for name in (*COLUMNS, "void_of"):
        if name in TEXT_COLUMNS:
            cells = table[name] if name in table else [""] * len(table)
            columns[name] = np.array(["" if pd.isna(cell) else str(cell) for cell in cells], dtype=object)
        else:
            columns[name] = table[name].to_numpy(dtype=np.float64) if name in table else np.full(len(table), np.nan)
    return pd.DataFrame(columns, dtype=object).astype(
        {name: np.float64 for name in columns if name not in TEXT_COLUMNS}
    )


def _without_voided(table: pd.DataFrame, place: Place) -> pd.DataFrame:
    standing: dict[int, int] = {}  # step number -> row
    steps, voids = table["step"].to_numpy(), table["void_of"].to_numpy()
    windowless = np.isnan(table["t_start_s"].to_numpy()) & np.isnan(table["t_end_s"].to_numpy())
    for row, (step, void) in enumerate(zip(steps, voids, strict=True)):
        if not np.isnan(void):
            if standing.pop(int(void), None) is None:
                raise FileFormatError(
                    where=f"{place(row)}, column 'void_of'",
                    what=f"there is no step {void:g} before it to take back",
                    mend="Write the number of an earlier step.",
                )
            if windowless[row]:
                continue
        if np.isnan(step) or step != int(step):
            raise FileFormatError(
                where=f"{place(row)}, column 'step'",
                what=f"{step!r} is no whole number",
                mend="Number the steps 1, 2, 3 …",
            )
        if int(step) in standing:
            raise FileFormatError(
                where=f"{place(row)}, column 'step'",
                what=f"step {step:g} stands there twice",
                mend="Number the steps 1, 2, 3 …",
            )
        standing[int(step)] = row
    return table.iloc[sorted(standing.values())]


def _known_words(column: pd.Series, name: str, allowed: tuple[str, ...], refuse_if: Callable[..., None]) -> pd.Series:
    words = column.astype(str).str.strip().str.lower()

    def what(index: int) -> str:
        meant = near(words.iloc[index], allowed)
        return f"{column.iloc[index]!r} is not one of {', '.join(allowed)}" + (
            f"; {meant!r} is meant?" if meant else ""
        )

    refuse_if(~words.isin(allowed).to_numpy(), name, what, "Correct the word.")
    return words


def _check_numbers(table: pd.DataFrame, refuse_if: Callable[..., None]) -> None:
    for name in ("cycle", "t_start_s", "t_end_s"):
        values = table[name].to_numpy()
        refuse_if(~np.isfinite(values), name, lambda _: "the cell is empty or no finite number", "Fill the cell.")
    start, end = table["t_start_s"].to_numpy(), table["t_end_s"].to_numpy()
    cycle = table["cycle"].to_numpy()
    refuse_if(
        (cycle != np.floor(cycle)) | (cycle < 0),
        "cycle",
        lambda i: f"{cycle[i]:g} is no whole number from 0",
        "Number the cycles 1, 2, 3 …, presses before them 0.",
    )
    refuse_if(
        ~(end > start),
        "t_end_s",
        lambda i: f"the window ends at {end[i]:g} s, which is not after its start at {start[i]:g} s",
        "Correct the times.",
    )
    backwards = np.concatenate([[False], np.diff(start) < 0])
    refuse_if(
        backwards,
        "t_start_s",
        lambda i: f"time runs backwards: {start[i]:g} s after {start[i - 1]:g} s",
        "Sort the rows by time.",
    )
    for name in ("mass_kg", "load_N"):
        values = table[name].to_numpy()
        refuse_if(np.isinf(values), name, lambda _: "the cell is infinite", "Write the load put on.")
    mass = table["mass_kg"].to_numpy()
    refuse_if(
        mass < 0,
        "mass_kg",
        lambda i: f"{mass[i]:g} kg is below 0",
        "Write what was added since the zero; for a pull give load_N, negative.",
    )


def _filled_kinds(table: pd.DataFrame) -> pd.Series:
    zero = table["direction"].to_numpy() == "zero"
    start, end = table["t_start_s"].to_numpy(), table["t_end_s"].to_numpy()
    after_load = np.zeros(len(table), dtype=bool)
    after_load[1:] = zero[1:] & ~zero[:-1] & (start[1:] - end[:-1] < QUICK_WITHIN_s)
    tilted = (table[list(TILT_COLUMNS)].to_numpy() != 0.0).any(axis=1)
    kinds = table["kind"].astype(str).str.strip()
    return kinds.where(kinds != "", np.where(tilted, "tilted", np.where(after_load, "quick", "hold")))


def _check_loads(table: pd.DataFrame, refuse_if: Callable[..., None]) -> None:
    mass, load = table["mass_kg"].to_numpy(), table["load_N"].to_numpy()
    zero = table["direction"].to_numpy() == "zero"
    entered = np.where(np.isnan(load), np.nan_to_num(mass), load)
    refuse_if(
        zero & (entered != 0),
        "direction",
        lambda i: f"a zero step carries a load ({mass[i]:g} kg, {load[i]:g} N)",
        "Write up or down, or clear the load.",
    )
    unknown = ~zero & np.isnan(mass) & np.isnan(load) & table["kind"].isin(LOADED_KINDS).to_numpy()
    refuse_if(unknown, "mass_kg", lambda _: "neither mass_kg nor load_N is given", "Write the mass put on.")


def _check_tilts(table: pd.DataFrame, refuse_if: Callable[..., None]) -> None:
    level = (table["kind"] != "tilted").to_numpy()
    for name in TILT_COLUMNS:
        tilt_deg = table[name].to_numpy()
        refuse_if(
            ~(np.abs(tilt_deg) <= MOST_TILT_deg),
            name,
            lambda i, tilt_deg=tilt_deg: f"a tilt of {tilt_deg[i]:g} degrees is beyond ±{MOST_TILT_deg:g}",
            "Write the angle of the wedge in degrees.",
        )
        refuse_if(
            level & (tilt_deg != 0.0),
            name,
            lambda i: f"a step of kind {table['kind'].iloc[i]!r} has a tilt",
            "Write kind tilted, or clear the tilt: only tilted steps may carry one.",
        )


def _check_inside(table: pd.DataFrame, t_s: FloatArray, refuse_if: Callable[..., None]) -> None:
    slack_s = 2.0 * float(np.median(np.diff(t_s))) if len(t_s) > 1 else 0.0
    start, end = table["t_start_s"].to_numpy(), table["t_end_s"].to_numpy()
    outside = (start < t_s[0] - slack_s) | (end > t_s[-1] + slack_s)
    unread = np.searchsorted(t_s, end, side="right") <= np.searchsorted(t_s, start)
    refuse_if(
        outside | unread,
        "t_start_s",
        lambda i: (
            f"the window of step {table['step'].iloc[i]:g}, {start[i]:g} to {end[i]:g} s, lies outside the readings "
            f"or in a gap of them (they cover {t_s[0]:g} to {t_s[-1]:g} s)"
        ),
        "Correct the times, or delete the step.",
    )


def _typed(table: pd.DataFrame) -> pd.DataFrame:
    kinds: dict[str, type] = dict.fromkeys(COLUMNS, np.float64)
    kinds |= dict.fromkeys(("step", "cycle"), np.int64) | dict.fromkeys(TEXT_COLUMNS, object)
    return table.astype({name: kinds[name] for name in table.columns}).reset_index(drop=True)
