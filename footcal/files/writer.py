"""A long table written block by block, whole in the end or not at all."""

from __future__ import annotations

import gzip
import os
from collections.abc import Callable, Iterator, Mapping
from contextlib import ExitStack, contextmanager
from pathlib import Path

import pyarrow as pa
from numpy.typing import ArrayLike
from pyarrow import csv as pa_csv
from pyarrow import parquet as pq

from footcal.files.atomic import replacing
from footcal.files.tables import check_suffix

Columns = Mapping[str, ArrayLike]


@contextmanager
def streamed_table(
    path: str | os.PathLike[str], metadata: Mapping[str, str] | None = None
) -> Iterator[Callable[[Columns], None]]:
    """Yield a function that appends one block of columns to a .csv, .csv.gz or .parquet file.

    The first block sets names and types; all columns of a block are equally long. The file appears under its name only
    when the context ends without an error.

    Args:
        path: the file to write.
        metadata: words kept in a Parquet file's metadata.

    Raises:
        SettingError: another suffix, or the folder can't be written.
    """
    target = Path(path)
    check_suffix(target)
    with replacing(target) as temporary, ExitStack() as stack:
        writer: list[pq.ParquetWriter | pa_csv.CSVWriter] = []

        def append(columns: Columns) -> None:
            table = pa.table({name: pa.array(values) for name, values in columns.items()})
            if metadata:
                table = table.replace_schema_metadata(dict(metadata))
            if not writer:
                writer.append(stack.enter_context(_opened(temporary, target, table.schema, stack)))
            writer[0].write_table(table)

        yield append


def _opened(temporary: Path, target: Path, schema: pa.Schema, stack: ExitStack) -> pq.ParquetWriter | pa_csv.CSVWriter:
    if target.name.lower().endswith(".parquet"):
        return pq.ParquetWriter(temporary, schema, compression="zstd")
    options = pa_csv.WriteOptions(quoting_style="none")
    if target.name.lower().endswith(".gz"):
        return pa_csv.CSVWriter(stack.enter_context(gzip.open(temporary, "wb")), schema, write_options=options)
    return pa_csv.CSVWriter(temporary, schema, write_options=options)
