"""Tables of numbers in CSV, gzipped CSV and Parquet: read with every bad cell named, written whole or not at all."""

from __future__ import annotations

import gzip
import os
import re
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from pathlib import Path
from typing import IO, Final, cast

import numpy as np
import pandas as pd
import pyarrow as pa
from numpy.typing import NDArray
from pyarrow import csv as pa_csv
from pyarrow import parquet as pq

from footcal.errors import FileFormatError, SettingError
from footcal.files.atomic import replacing
from footcal.files.columns import ColumnRules, sources
from footcal.files.places import (
    NULL_WORDS,
    bad_number,
    broken_as_file_error,
    first_bad_csv_cell,
    is_csv,
    missing_column,
    place_of,
    read_bytes,
)
from footcal.records import FloatArray

SUFFIXES = (".csv", ".csv.gz", ".parquet")
_GROUP_ROWS: Final = 120_000  # two minutes at 1 kHz: what a reader in chunks has to hold at least
_COMMENT_LINES = re.compile(rb"(?m)^#[^\n]*(?:\n|\Z)")


def read_table(
    path: str | os.PathLike[str],
    *,
    required: Sequence[str] = (),
    text: Sequence[str] = (),
    full: Sequence[str] = (),
    rules: ColumnRules | None = None,
    only: Collection[str] | None = None,
    empty_ok: bool = False,
) -> pd.DataFrame:
    """Return a table; every column not named in `text` is float64, an empty cell is NaN.

    Lines that start with `#` are no data; `# key: value` lines and Parquet's metadata come back in
    `frame.attrs["metadata"]`, all column names of the file in `frame.attrs["names_in_file"]`.

    Args:
        path: a .csv, .csv.gz or .parquet file.
        required: columns that must be there.
        text: columns that may hold words; they come back as strings, empty cells as "".
        full: columns in which every cell must hold a finite number.
        rules: our column name -> where it stands in the file, and its scale.
        only: names of the columns wanted (ours); what else the file holds is not looked at. None: all.
        empty_ok: whether a header without rows is good.

    Raises:
        FileFormatError: missing, empty, cut or foreign file; missing or doubled column; text where a number belongs;
            an empty or infinite cell in a column of `full`. The message names row and column.
        SettingError: the suffix is none of those three.
    """
    path, rules = Path(path), rules or {}
    check_suffix(path)

    def origin_of(names: Sequence[str]) -> dict[str, str]:
        """Return our column -> column of the file, once the header is known to hold what is needed."""
        _check_header(path, names, required, rules)
        return {ours: name for ours, name in sources(names, rules).items() if only is None or ours in only}

    with broken_as_file_error(path):
        table, metadata = _csv_table(path, text, origin_of) if is_csv(path) else _parquet_table(path)
    origin = origin_of(table.column_names)
    if not table.num_rows and not empty_ok:
        raise FileFormatError(
            where=str(path), what="there is a header but no row of data", mend="Record or export it again."
        )
    columns = {
        ours: _text(table.column(name)) if ours in text else _numbers(path, ours, name, table, rules)
        for ours, name in origin.items()
    }
    frame = pd.DataFrame(columns)
    frame.attrs["metadata"] = metadata
    frame.attrs["names_in_file"] = list(table.column_names)
    for name in full:
        if name in frame:
            check_full(path, name, np.asarray(frame[name], dtype=np.float64))
    return frame


def write_table(frame: pd.DataFrame, path: str | os.PathLike[str], metadata: Mapping[str, str] | None = None) -> None:
    """Write a table as its suffix says; numbers read back bit for bit, NaN is an empty cell, words stay on one line.

    Args:
        frame: numeric and string columns; the index is not written.
        path: a .csv, .csv.gz or .parquet file, replaced only once all is written.
        metadata: Parquet's schema metadata, or `# key: value` lines at the head of a CSV file.

    Raises:
        SettingError: the suffix is none of those three, or the place can't be written.
    """
    path = Path(path)
    check_suffix(path)
    words = [name for name in frame.columns if not pd.api.types.is_numeric_dtype(frame[name])]
    frame = frame.assign(**{name: [" ".join(str(cell).splitlines()) for cell in frame[name]] for name in words})
    table = pa.Table.from_pandas(frame, preserve_index=False).replace_schema_metadata(dict(metadata or {}))
    with replacing(path) as temporary:
        if not is_csv(path):
            pq.write_table(table, temporary, compression="zstd", row_group_size=_GROUP_ROWS)
        elif path.name.lower().endswith(".gz"):
            # no time stamp inside, so that equal tables make equal files
            with temporary.open("wb") as raw, gzip.GzipFile("", "wb", 6, raw, mtime=0) as packed:
                _write_csv(table, cast("IO[bytes]", packed), metadata or {})
        else:
            with temporary.open("wb") as raw:
                _write_csv(table, raw, metadata or {})


def check_suffix(path: Path, suffixes: Sequence[str] = SUFFIXES) -> None:
    """Refuse a file whose form its name does not tell.

    Raises:
        SettingError: none of the suffixes fits.
    """
    if not path.name.lower().endswith(tuple(suffixes)):
        raise SettingError(
            where=str(path),
            what=f"tables of the kind {path.suffix or 'without suffix'!r} are not supported",
            mend=f"Use one of: {', '.join(suffixes)}.",
        )


def check_full(path: Path, name: str, values: FloatArray) -> None:
    """Refuse a column with an empty, NaN or infinite cell.

    Raises:
        FileFormatError: names the first such row.
    """
    bad = ~np.isfinite(values)
    if bad.any():
        row = int(np.argmax(bad))
        found = "empty or NaN" if np.isnan(values[row]) else "infinite"
        raise FileFormatError(
            where=f"{place_of(path, row)}, column {name!r}",
            what=f"the cell is {found}, a finite number is needed ({int(bad.sum())} such cells in all)",
            mend="Fill the cell or delete the row.",
        )


def csv_options(numeric: Iterable[str], text: Iterable[str]) -> pa_csv.ConvertOptions:
    """Return how CSV cells become values: named columns as numbers, or as words; nothing is guessed."""
    types = dict.fromkeys(numeric, pa.float64()) | dict.fromkeys(text, pa.string())
    return pa_csv.ConvertOptions(column_types=types, null_values=list(NULL_WORDS), strings_can_be_null=False)


def header_of(first_line: bytes) -> list[str]:
    """Return the column names of a CSV header line."""
    parsed = pa_csv.read_csv(pa.BufferReader(first_line.rstrip(b"\r\n") + b"\n"))
    return [str(name) for name in parsed.column_names]


def _csv_table(
    path: Path, text: Sequence[str], origin_of: Callable[[Sequence[str]], dict[str, str]]
) -> tuple[pa.Table, dict[str, str]]:
    data = read_bytes(path).removeprefix(b"\xef\xbb\xbf")
    metadata = head_metadata(data)
    if data.startswith(b"#") or b"\n#" in data:
        data = _COMMENT_LINES.sub(b"", data)
    data = data.lstrip(b"\r\n")
    if not data.strip():
        raise FileFormatError(where=str(path), what="the file is empty", mend="Record or export it again.")
    names = header_of(data.split(b"\n", 1)[0])
    origin = origin_of(names)
    words = [name for ours, name in origin.items() if ours in text]
    others = [name for name in names if name not in origin.values()]  # kept as words, never looked at
    numeric = {name: ours for ours, name in origin.items() if name not in words}
    try:
        table = pa_csv.read_csv(
            pa.BufferReader(data),
            parse_options=pa_csv.ParseOptions(newlines_in_values=bool(words or others)),
            convert_options=csv_options(numeric, [*words, *others]),
        )
    except pa.ArrowInvalid as error:
        found = first_bad_csv_cell(path, numeric)
        raise found or error from error
    return table, metadata


def head_metadata(data: bytes) -> dict[str, str]:
    """Return the `# key: value` lines at the head of a CSV file."""
    found: dict[str, str] = {}
    for line in data[:65_536].split(b"\n"):
        if not line.startswith(b"#"):
            break
        key, colon, value = line[1:].decode(errors="replace").partition(":")
        if colon:
            found[key.strip()] = value.strip()
    return found


def _parquet_table(path: Path) -> tuple[pa.Table, dict[str, str]]:
    table = pq.read_table(path)
    table.validate()
    return table, text_metadata(table.schema.metadata)


def text_metadata(metadata: Mapping[bytes, bytes] | None) -> dict[str, str]:
    """Return Parquet's metadata as text, what other tools keep there for themselves left out."""
    ours = {key: value for key, value in (metadata or {}).items() if key not in {b"pandas", b"ARROW:schema"}}
    return {key.decode(errors="replace"): value.decode(errors="replace") for key, value in ours.items()}


def _check_header(path: Path, names: Sequence[str], required: Sequence[str], rules: ColumnRules) -> None:
    doubled = sorted({name for name in names if names.count(name) > 1})
    if doubled:
        raise FileFormatError(
            where=f"{path}, header",
            what=f"column {doubled[0]!r} stands there twice",
            mend="Delete or rename one of them.",
        )
    there = sources(names, rules)
    for name in required:
        if name not in there:
            raise missing_column(path, rules[name].name if name in rules else name, names)


def _text(column: pa.ChunkedArray) -> NDArray[np.object_]:
    words = ["" if value is None else str(value).strip() for value in column.to_pylist()]
    return np.array(words, dtype=object)


def _numbers(path: Path, ours: str, name: str, table: pa.Table, rules: ColumnRules) -> FloatArray:
    values = to_float64(path, ours, table.column(name))
    rule = rules.get(ours)
    return rule.apply(values) if rule and rule.name == name else values


def to_float64(path: Path, name: str, column: pa.ChunkedArray, first_row: int = 0) -> FloatArray:
    """Return a column as float64, nulls as NaN.

    Raises:
        FileFormatError: a cell holds something that is no number; names its row.
    """
    if pa.types.is_string(column.type) or pa.types.is_large_string(column.type):
        for row, value in enumerate(column.to_pylist()):
            if value is not None and not _is_number(value):
                raise bad_number(place_of(path, first_row + row), name, value)
    try:
        cast_column = column.cast(pa.float64(), safe=False)
    except pa.ArrowException as error:
        raise FileFormatError(
            where=f"{path}, column {name!r}",
            what=f"it holds {column.type}, numbers are needed",
            mend="Export it as numbers.",
        ) from error
    return np.array(cast_column.to_numpy(), dtype=np.float64)


def _is_number(value: str) -> bool:
    try:
        float(value)
    except ValueError:
        return False
    return True


def _write_csv(table: pa.Table, out: IO[bytes], metadata: Mapping[str, str]) -> None:
    for key, value in metadata.items():
        one_line = " ".join(f"{key}: {value}".split())
        out.write(f"# {one_line}\n".encode())
    names = [f'"{name}"' if re.search(r'[",#\s]', name) else name for name in table.column_names]
    out.write((",".join(names) + "\n").encode())
    pa_csv.write_csv(table, out, pa_csv.WriteOptions(include_header=False, quoting_style="needed"))
