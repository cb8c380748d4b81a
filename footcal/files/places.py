"""Where in a file something stands, in words: only asked once an error is certain, so it may be slow."""

from __future__ import annotations

import csv
import difflib
import gzip
import re
import zlib
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path

import pyarrow as pa

from footcal.errors import FileFormatError

NULL_WORDS = ("", "nan", "NaN", "NAN", "null", "NULL", "None", "NA", "N/A", "n/a", "-nan")
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?|[+-]?(inf|infinity)", re.IGNORECASE)
_BROKEN = (OSError, EOFError, ValueError, zlib.error, csv.Error, pa.ArrowException, MemoryError)


def is_csv(path: Path) -> bool:
    """Return whether the name says CSV, plain or gzipped."""
    return path.name.lower().endswith((".csv", ".csv.gz"))


def read_bytes(path: Path) -> bytes:
    """Return the bytes of a file, gunzipped where the name says so."""
    if path.name.lower().endswith(".gz"):
        with gzip.open(path) as opened:
            return opened.read()
    return path.read_bytes()


@contextmanager
def broken_as_file_error(path: Path) -> Iterator[None]:
    """Turn whatever a missing, cut or foreign file makes the readers raise into one FileFormatError."""
    try:
        yield
    except FileNotFoundError as error:
        raise FileFormatError(where=str(path), what="no such file", mend="Check the path.") from error
    except IsADirectoryError as error:
        raise FileFormatError(
            where=str(path), what="this is a folder, a file is needed", mend="Name the file inside it."
        ) from error
    except _BROKEN as error:
        reason = " ".join(str(error).split())[:160] or type(error).__name__
        raise FileFormatError(
            where=str(path),
            what=f"can't be read, it may be cut or of another form ({reason})",
            mend="Copy or export it again.",
        ) from error


def csv_lines(path: Path) -> Iterator[tuple[int, list[str]]]:
    """Yield the header and the data rows of a CSV file, each with the line an editor shows it on."""
    opener = gzip.open if path.name.lower().endswith(".gz") else open
    with opener(path, "rt", encoding="utf-8-sig", newline="") as opened:
        before = 0
        reader = csv.reader(opened)
        for row in reader:
            line, before = before + 1, reader.line_num
            if row and not row[0].startswith("#"):
                yield line, row


def place_of(path: Path, row: int) -> str:
    """Return the words for data row `row` (from 0): the editor's line of a CSV file, the row from 1 of any other."""
    if is_csv(path):
        try:
            for count, (line, _) in enumerate(csv_lines(path)):
                if count == row + 1:
                    return f"{path}, line {line}"
        except _BROKEN:
            pass
    return f"{path}, row {row + 1}"


def near(name: str, names: Sequence[str]) -> str | None:
    """Return the name that was probably meant, or None: letter case and small slips are forgiven."""
    folded = {known.lower().replace(" ", ""): known for known in names}
    found = difflib.get_close_matches(name.lower(), list(folded), n=1, cutoff=0.6)
    return folded[found[0]] if found else None


def missing_column(path: Path | str, wanted: str, found: Sequence[str], rules_in: str = "recipe") -> FileFormatError:
    """Return the error for a column that is not there, with the one that was probably meant."""
    listed = ", ".join(found[:12]) + (", …" if len(found) > 12 else "")
    if len(found) == 1 and any(mark in found[0] for mark in ";\t"):
        return FileFormatError(
            where=f"{path}, header",
            what=f"the columns are not divided by commas: {found[0][:60]!r}",
            mend="Save it with commas between columns and points in numbers.",
        )
    meant = near(wanted, found)
    rename = f"Rename {meant!r} to {wanted!r}" if meant else f"Add {wanted!r}"
    return FileFormatError(
        where=f"{path}, header",
        what=f"column {wanted!r} is missing (found: {listed})",
        mend=f"{rename}, or map it in [columns] of the {rules_in}.",
    )


def bad_number(place: str, column: str, value: str) -> FileFormatError:
    """Return the error for text where a number belongs."""
    comma = "," in value and value.replace(",", ".", 1).replace(".", "", 1).lstrip("+-").isdigit()
    mend = "Write numbers with a decimal point." if comma else "Write a number, or leave the cell empty."
    return FileFormatError(where=f"{place}, column {column!r}", what=f"{value[:60]!r} is not a number", mend=mend)


def first_bad_csv_cell(path: Path, numeric: Mapping[str, str]) -> FileFormatError | None:
    """Return the error for the first row of wrong length or cell that is no number; None where all is well.

    Args:
        path: the CSV file.
        numeric: column in the file -> the name to give it in the message.
    """
    lines = csv_lines(path)
    _, header = next(lines, (0, []))
    wanted = [(index, numeric[name.strip()]) for index, name in enumerate(header) if name.strip() in numeric]
    for line, row in lines:
        if len(row) != len(header):
            return FileFormatError(
                where=f"{path}, line {line}",
                what=f"{len(row)} cells where the header has {len(header)} columns",
                mend="The file may be cut or a comma be missing: complete or delete the line.",
            )
        for index, name in wanted:
            cell = row[index].strip()
            if cell not in NULL_WORDS and not _NUMBER.fullmatch(cell):
                return bad_number(f"{path}, line {line}", name, row[index])
    return None
