"""Tables of numbers, read with every bad cell named."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from footcal.errors import FileFormatError, SettingError
from footcal.files.columns import ColumnRule
from footcal.files.tables import SUFFIXES, read_table, write_table

SHARED_FOLDER = settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


def example(rows: int = 20) -> pd.DataFrame:
    """Return a table of three numeric columns and one of words."""
    rng = np.random.default_rng(7)
    return pd.DataFrame(
        {
            "t_s": np.arange(rows) * 0.1,
            "raw": rng.normal(size=rows),
            "temp_C": np.where(np.arange(rows) % 3 == 0, 20.0, np.nan),
            "note": [f"row, {k}" for k in range(rows)],
        }
    )


def written(path: Path, text: str) -> Path:
    """Write text to a file and return its path."""
    path.write_text(text, encoding="utf-8")
    return path


@pytest.mark.parametrize("suffix", SUFFIXES)
@SHARED_FOLDER
@given(st.lists(st.tuples(st.floats(), st.text(st.characters(codec="utf-8"), max_size=8)), min_size=1, max_size=6))
def test_numbers_come_back_bit_for_bit(tmp_path: Path, suffix: str, cells: list[tuple[float, str]]) -> None:
    """Every float survives each form of file, words beside it do not disturb."""
    frame = pd.DataFrame({"value": [cell[0] for cell in cells], "word": [cell[1] for cell in cells]})
    write_table(frame, tmp_path / f"a{suffix}")
    back = read_table(tmp_path / f"a{suffix}", text=["word"])
    same = (back["value"].to_numpy() == frame["value"].to_numpy()) | (back["value"].isna() & frame["value"].isna())
    assert same.all()
    assert (np.signbit(back["value"].dropna()) == np.signbit(frame["value"].dropna())).all()


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_words_and_metadata_come_back(tmp_path: Path, suffix: str) -> None:
    """A comma in a word and a colon in a metadata value do no harm."""
    write_table(example(), tmp_path / f"a{suffix}", {"frame": "body", "made": "with: care"})
    back = read_table(tmp_path / f"a{suffix}", text=["note"])
    assert list(back["note"]) == list(example()["note"])
    assert back.attrs["metadata"] == {"frame": "body", "made": "with: care"}


def test_equal_tables_make_equal_gzip_files(tmp_path: Path) -> None:
    """No time stamp inside: a digest says whether the content is the same."""
    write_table(example(), tmp_path / "a.csv.gz")
    write_table(example(), tmp_path / "b.csv.gz")
    assert (tmp_path / "a.csv.gz").read_bytes() == (tmp_path / "b.csv.gz").read_bytes()


@pytest.mark.parametrize("suffix", [".csv.gz", ".parquet"])
def test_a_cut_packed_file_is_always_a_file_error(tmp_path: Path, suffix: str) -> None:
    """Cut at every byte, a packed file is refused as cut, and never in another way."""
    write_table(example(), tmp_path / f"a{suffix}")
    whole = (tmp_path / f"a{suffix}").read_bytes()
    cut = tmp_path / f"cut{suffix}"
    for size in range(len(whole)):
        cut.write_bytes(whole[:size])
        with pytest.raises(FileFormatError):
            read_table(cut, required=["t_s", "raw"], text=["note"])


def test_a_cut_csv_is_a_file_error_or_its_own_beginning(tmp_path: Path) -> None:
    """Cut at every byte, a CSV file is refused, or gives rows of which only the last cell may be shortened."""
    write_table(example()[["t_s", "raw"]], tmp_path / "a.csv")
    whole, full = (tmp_path / "a.csv").read_bytes(), read_table(tmp_path / "a.csv")
    cut = tmp_path / "cut.csv"
    refused = 0
    for size in range(len(whole)):
        cut.write_bytes(whole[:size])
        try:
            part = read_table(cut, required=["t_s", "raw"])
        except FileFormatError:
            refused += 1
            continue
        assert part.iloc[:-1].equals(full.iloc[: len(part) - 1])
        assert part["t_s"].iloc[-1] == full["t_s"].iloc[len(part) - 1]
    assert refused > 0


@SHARED_FOLDER
@given(data=st.binary(max_size=60), suffix=st.sampled_from(SUFFIXES))
def test_any_bytes_give_a_table_or_a_file_error(tmp_path: Path, data: bytes, suffix: str) -> None:
    """Foreign content is refused in one way."""
    (tmp_path / f"a{suffix}").write_bytes(data)
    try:
        frame = read_table(tmp_path / f"a{suffix}", required=["t_s"])
    except FileFormatError:
        return
    assert "t_s" in frame


def test_text_in_a_number_is_named_by_line_column_and_value(tmp_path: Path) -> None:
    """Comment and empty lines count as an editor counts them."""
    path = written(tmp_path / "a.csv", "# made by hand\nt_s,raw\n0,1\n\n# pause\n1,oops\n")
    with pytest.raises(FileFormatError, match=r"a\.csv, line 6, column 'raw': 'oops' is not a number"):
        read_table(path)


def test_a_decimal_comma_is_explained(tmp_path: Path) -> None:
    """A number with a comma is met by the advice to write a point."""
    path = written(tmp_path / "a.csv", 't_s,raw\n0,"1,5"\n')
    with pytest.raises(FileFormatError, match="decimal point"):
        read_table(path)


def test_semicolons_between_columns_are_explained(tmp_path: Path) -> None:
    """A header that is divided by semicolons is met by the advice to use commas."""
    path = written(tmp_path / "a.csv", "t_s;raw\n0;1\n")
    with pytest.raises(FileFormatError, match="commas between columns"):
        read_table(path, required=["t_s"])


def test_text_in_a_parquet_number_is_named_by_row(tmp_path: Path) -> None:
    """Parquet has rows, not lines; they are counted from 1."""
    pd.DataFrame({"t_s": ["0", "1", "x"]}).to_parquet(tmp_path / "a.parquet")
    with pytest.raises(FileFormatError, match=r"row 3, column 't_s': 'x'"):
        read_table(tmp_path / "a.parquet")


def test_a_missing_column_is_named_with_the_one_that_was_meant(tmp_path: Path) -> None:
    """Another letter case is recognised."""
    path = written(tmp_path / "a.csv", "t_s,Raw\n0,1\n")
    with pytest.raises(FileFormatError, match=r"'raw' is missing.*Rename 'Raw' to 'raw'"):
        read_table(path, required=["raw"])


@pytest.mark.parametrize(("text", "reason"), [("", "empty"), ("\n\n", "empty"), ("t_s,raw\n", "no row of data")])
def test_an_empty_file_is_refused(tmp_path: Path, text: str, reason: str) -> None:
    """No bytes, no header, or no row."""
    with pytest.raises(FileFormatError, match=reason):
        read_table(written(tmp_path / "a.csv", text))


@pytest.mark.parametrize("cell", ["", "nan", "inf"])
def test_a_cell_that_must_be_finite_is_named(tmp_path: Path, cell: str) -> None:
    """An empty, NaN or infinite cell where a number is needed."""
    path = written(tmp_path / "a.csv", f"t_s,raw\n0,1\n1,{cell}\n")
    with pytest.raises(FileFormatError, match="line 3, column 'raw'"):
        read_table(path, full=["raw"])


def test_a_row_of_wrong_length_is_named(tmp_path: Path) -> None:
    """One cell is missing on line 3."""
    with pytest.raises(FileFormatError, match="line 3: 1 cells where the header has 2"):
        read_table(written(tmp_path / "a.csv", "t_s,raw\n0,1\n1\n"))


def test_a_doubled_column_is_refused(tmp_path: Path) -> None:
    """Two columns of one name can't both be meant."""
    with pytest.raises(FileFormatError, match="'raw' stands there twice"):
        read_table(written(tmp_path / "a.csv", "raw,raw\n0,1\n"))


def test_columns_that_are_not_wanted_may_hold_anything(tmp_path: Path) -> None:
    """A remark beside the numbers does not matter where only the numbers are asked for."""
    path = written(tmp_path / "a.csv", "t_s,remark\n0,fine\n")
    assert read_table(path, only=["t_s"]).to_dict("list") == {"t_s": [0.0]}


def test_a_rule_renames_and_scales(tmp_path: Path) -> None:
    """Milliseconds become seconds: by hand, 250 ms * 0.001 + 1 s = 1.25 s."""
    path = written(tmp_path / "a.csv", "time_ms\n250\n")
    frame = read_table(path, required=["t_s"], rules={"t_s": ColumnRule("time_ms", scale=0.001, offset=1.0)})
    assert frame["t_s"].to_list() == [1.25]


def test_one_column_may_feed_several(tmp_path: Path) -> None:
    """One thermometer serves two feet."""
    path = written(tmp_path / "a.csv", "board_C\n21\n")
    rules = {"a.temp_C": ColumnRule("board_C"), "b.temp_C": ColumnRule("board_C")}
    assert read_table(path, rules=rules).to_dict("list") == {"a.temp_C": [21.0], "b.temp_C": [21.0]}


def test_a_byte_order_mark_is_no_part_of_the_first_name(tmp_path: Path) -> None:
    """Spreadsheets put one in front."""
    (tmp_path / "a.csv").write_bytes(b"\xef\xbb\xbft_s\r\n1\r\n")
    assert read_table(tmp_path / "a.csv", required=["t_s"])["t_s"].to_list() == [1.0]


def test_gzipped_text_errors_name_their_line_too(tmp_path: Path) -> None:
    """The place is found inside the packed file."""
    (tmp_path / "a.csv.gz").write_bytes(gzip.compress(b"t_s\n1\nx\n"))
    with pytest.raises(FileFormatError, match="line 3"):
        read_table(tmp_path / "a.csv.gz")


def test_another_kind_of_file_is_refused_with_what_is_supported(tmp_path: Path) -> None:
    """The message lists the forms that are read."""
    with pytest.raises(SettingError, match=r"\.csv, \.csv\.gz, \.parquet"):
        read_table(tmp_path / "a.xlsx")


def test_a_missing_file_says_so(tmp_path: Path) -> None:
    """No trace of Python's own error is left."""
    with pytest.raises(FileFormatError, match="no such file"):
        read_table(tmp_path / "a.csv")
