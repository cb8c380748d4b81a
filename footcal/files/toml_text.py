"""TOML in and out: read with the line named where it is broken, written from plain values."""

from __future__ import annotations

import datetime as dt
import json
import os
import re
import tomllib
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from footcal.errors import FileFormatError

_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")


def read_toml(path: str | os.PathLike[str]) -> dict[str, Any]:
    """Return the content of a TOML file.

    Raises:
        FileFormatError: it can't be read or is no TOML; the message names line and column.
    """
    try:
        return tomllib.loads(Path(path).read_bytes().decode("utf-8-sig"))
    except FileNotFoundError as error:
        raise FileFormatError(where=str(path), what="no such file", mend="Check the path.") from error
    except (OSError, ValueError, RecursionError) as error:
        raise FileFormatError(
            where=str(path), what=f"this is no TOML ({error})", mend="Write one `key = value` a line, words in quotes."
        ) from error


def toml_text(document: Mapping[str, Any]) -> str:
    """Return a document as TOML: plain values first, then tables and lists of tables; None is left out.

    Args:
        document: strings, booleans, numbers, datetimes, lists and nested mappings.

    Raises:
        TypeError: a value has no TOML form.
    """
    return "\n".join(_lines(document, ())).strip("\n") + "\n"


def _lines(table: Mapping[str, Any], path: tuple[str, ...]) -> list[str]:
    present = {key: value for key, value in table.items() if value is not None}
    lines = [f"{_key(key)} = {_value(value)}" for key, value in present.items() if not _is_table(value)]
    for key, value in present.items():
        if _is_table(value):
            name = ".".join(_key(part) for part in (*path, key))
            head, parts = ("[{}]", [value]) if isinstance(value, Mapping) else ("[[{}]]", value)
            for part in parts:
                lines += ["", head.format(name), *_lines(part, (*path, key))]
    return lines


def _is_table(value: Any) -> bool:
    return isinstance(value, Mapping) or (
        isinstance(value, list | tuple) and bool(value) and all(isinstance(part, Mapping) for part in value)
    )


def _key(key: str) -> str:
    return key if _BARE_KEY.fullmatch(key) else _quoted(key)


def _quoted(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _value(value: Any) -> str:
    if isinstance(value, str):
        return _quoted(value)
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return repr(value) if isinstance(value, int) else repr(float(value))
    if isinstance(value, dt.datetime | dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{_key(key)} = {_value(part)}" for key, part in value.items()) + " }"
    if isinstance(value, Sequence):
        return "[" + ", ".join(_value(part) for part in value) + "]"
    msg = f"{type(value).__name__} has no TOML form"
    raise TypeError(msg)
