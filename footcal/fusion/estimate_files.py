"""Estimates in files: .parquet and .csv tables, and flat JSON lines; written block by block, whole or not at all."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import IO, Any, Final, Protocol

import numpy as np
import orjson
import pyarrow as pa
from pyarrow import csv as pa_csv
from pyarrow import parquet as pq

from footcal.errors import FileFormatError
from footcal.files.atomic import replacing
from footcal.files.tables import check_suffix, read_table
from footcal.fusion.estimate import LEG_COLUMNS, WHOLE_NUMBERS, EstimateColumns, columns_from_table
from footcal.records import FloatArray, IntArray

SUFFIXES: Final = (".parquet", ".csv")


class BlockWriter(Protocol):
    """Takes one block of estimates after another."""

    def write(self, block: EstimateColumns) -> None:
        """Append a block."""


class _TableWriter:
    def __init__(self, path: Path, csv: bool, metadata: Mapping[str, str]) -> None:  # noqa: FBT001
        self._path, self._csv, self._metadata = path, csv, dict(metadata)
        self._out: Any = None
        self._file: Any = None

    def write(self, block: EstimateColumns) -> None:
        """Append a block; NaN becomes an empty cell."""
        table = pa.table({name: pa.array(values, from_pandas=True) for name, values in block.table().items()})
        table = table.replace_schema_metadata(self._metadata)
        if self._out is None:
            self._open(table.schema)
        self._out.write_table(table)

    def _open(self, schema: pa.Schema) -> None:
        if not self._csv:
            self._out = pq.ParquetWriter(self._path, schema, compression="zstd")
            return
        self._file = self._path.open("wb")
        for key, value in self._metadata.items():
            self._file.write(f"# {key}: {' '.join(value.split())}\n".encode())
        self._file.write((",".join(schema.names) + "\n").encode())
        options = pa_csv.WriteOptions(include_header=False, quoting_style="needed")
        self._out = pa_csv.CSVWriter(self._file, schema, write_options=options)

    def close(self) -> None:
        """Finish the file."""
        for part in (self._out, self._file):
            if part is not None:
                part.close()


@contextmanager
def estimate_writer(path: str | Path, metadata: Mapping[str, str]) -> Iterator[BlockWriter]:
    """Give a writer of blocks; the file stands at `path` only once all is written.

    Args:
        path: .parquet or .csv.
        metadata: digests and the like; Parquet's schema metadata, or `# key: value` lines at the head of a CSV file.

    Raises:
        SettingError: the suffix is neither.
    """
    path = Path(path)
    check_suffix(path, SUFFIXES)
    with replacing(path) as neighbour:
        writer = _TableWriter(neighbour, path.name.lower().endswith(".csv"), metadata)
        try:
            yield writer
        finally:
            writer.close()


def write_estimate(columns: EstimateColumns, path: str | Path, metadata: Mapping[str, str]) -> None:
    """Write a whole estimate; see `estimate_writer`."""
    with estimate_writer(path, metadata) as writer:
        writer.write(columns)


def read_estimate(path: str | Path, legs: Sequence[str] | None = None) -> EstimateColumns:
    """Return an estimate that `write_estimate` or any tool with the same column names has written.

    Args:
        path: .parquet, .csv or .csv.gz.
        legs: names and order wanted; None: all legs in the order of the file.

    Raises:
        FileFormatError: the file is missing, cut or foreign, or lacks a column, which is named.
    """
    frame = read_table(path, required=("t_s",), full=("t_s",))
    if legs is None:
        legs = tuple(dict.fromkeys(name.split(".", 1)[0] for name in frame.columns if name.endswith(".p_contact")))
    for leg in legs:
        for name in LEG_COLUMNS:
            if f"{leg}.{name}" not in frame:
                raise FileFormatError(
                    where=f"{path}, header",
                    what=f"column {leg}.{name} is missing",
                    mend="Give an estimate written by `footcal fuse`, of the robot with these legs.",
                )
    table: dict[str, FloatArray | IntArray] = {
        str(name): np.asarray(frame[name], dtype=np.float64) for name in frame.columns
    }
    for name, values in table.items():
        if name.rsplit(".", maxsplit=1)[-1] in WHOLE_NUMBERS and np.isnan(values).any():
            raise FileFormatError(
                where=f"{path}, row {int(np.argmax(np.isnan(values))) + 2}, column {name!r}",
                what="the cell is empty, a whole number is needed",
                mend="Write the estimate again.",
            )
    return columns_from_table(tuple(legs), table)


def json_lines(columns: EstimateColumns) -> Iterable[bytes]:
    """Yield one line of flat JSON a row, newline included; NaN becomes null."""
    table = columns.table()
    names = list(table)
    for row in zip(*(values.tolist() for values in table.values()), strict=True):
        yield orjson.dumps(dict(zip(names, row, strict=True)), option=orjson.OPT_APPEND_NEWLINE)


def write_json_lines(columns: EstimateColumns, out: IO[bytes]) -> None:
    """Write one line of flat JSON a row to an open binary stream."""
    out.writelines(json_lines(columns))
