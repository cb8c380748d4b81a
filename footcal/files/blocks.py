"""Long tables as a stream of blocks, so that memory stays bounded: Parquet by batches, CSV by bytes."""

from __future__ import annotations

import gzip
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Final, cast

import pyarrow as pa
from pyarrow import csv as pa_csv
from pyarrow import parquet as pq

from footcal.errors import FileFormatError
from footcal.files.places import first_bad_csv_cell, is_csv
from footcal.files.tables import csv_options, head_metadata, header_of, text_metadata

_BLOCK_BYTES: Final = 4 << 20
_HEAD_BYTES: Final = 1 << 16


@dataclass(frozen=True, slots=True)
class BlockTable:
    """A table whose header is known and whose rows are yet to be read."""

    names: tuple[str, ...]
    metadata: Mapping[str, str]
    blocks: Callable[[Mapping[str, str], int], Iterator[pa.Table]]  # (column in file -> our name, rows) -> blocks


def open_blocks(path: Path) -> BlockTable:
    """Return a .csv, .csv.gz or .parquet file ready to be read block by block.

    Raises:
        FileFormatError: the file is empty. Other trouble comes as the reader's own error: see `broken_as_file_error`.
    """
    return _csv_table(path) if is_csv(path) else _parquet_table(path)


def _parquet_table(path: Path) -> BlockTable:
    with pq.ParquetFile(path) as opened:
        schema = opened.schema_arrow

    def blocks(wanted: Mapping[str, str], rows: int) -> Iterator[pa.Table]:
        with pq.ParquetFile(path, pre_buffer=False) as opened:  # reading ahead would hold whole row groups
            for batch in opened.iter_batches(batch_size=rows, columns=list(wanted)):
                yield pa.Table.from_batches([batch])

    return BlockTable(tuple(schema.names), text_metadata(schema.metadata), blocks)


def _csv_table(path: Path) -> BlockTable:
    with _opened(path) as opened:
        head = opened.read(_HEAD_BYTES).removeprefix(b"\xef\xbb\xbf")
    lines = head.splitlines(keepends=True)
    before = next((n for n, line in enumerate(lines) if line.strip() and not line.startswith(b"#")), None)
    if before is None:
        raise FileFormatError(where=str(path), what="the file is empty", mend="Record or export it again.")
    names = tuple(header_of(lines[before]))

    def blocks(wanted: Mapping[str, str], rows: int) -> Iterator[pa.Table]:
        del rows  # blocks of a text file are cut by bytes
        try:
            yield from _csv_blocks(path, before, wanted)
        except pa.ArrowInvalid as error:
            raise first_bad_csv_cell(path, wanted) or error from error

    return BlockTable(names, head_metadata(head), blocks)


def _csv_blocks(path: Path, before: int, wanted: Iterable[str]) -> Iterator[pa.Table]:
    options = csv_options(wanted, ())
    options.include_columns = list(wanted)
    with _opened(path) as opened:
        try:
            reader = pa_csv.open_csv(
                opened, pa_csv.ReadOptions(block_size=_BLOCK_BYTES, skip_rows=before), convert_options=options
            )
        except pa.ArrowInvalid as error:
            if "Empty CSV" in str(error):  # a header alone
                return
            raise
        for batch in reader:
            if batch.num_rows:
                yield pa.Table.from_batches([batch])


def _opened(path: Path) -> IO[bytes]:
    return cast("IO[bytes]", gzip.open(path)) if path.name.lower().endswith(".gz") else path.open("rb")
