"""A refused value of a settings file, told by its path, with the way to mend it."""

from __future__ import annotations

import difflib
from collections.abc import Sequence
from typing import Any

from pydantic import BaseModel, ConfigDict, ValidationError, model_validator
from pydantic_core import PydanticCustomError

from footcal.errors import FileFormatError

_MENDS = {
    "missing": "Add the key, or take it from the example in the documentation.",
    "float_type": "Give a number without quotes; the unit stands in the key.",
    "float_parsing": "Give a number; the unit stands in the key.",
    "finite_number": "Give a finite number.",
    "string_type": "Put the value in quotes.",
    "string_pattern_mismatch": "Start with a letter; use letters, digits and underscores only.",
    "too_short": "Give the missing values.",
    "too_long": "Take out the values that are too many.",
    "union_tag_invalid": "Use one of the kinds listed.",
    "union_tag_not_found": 'Add kind = "…".',
}

_TAGGED = frozenset({"transmission"})  # after these pydantic puts the kind into the path, which the file does not have


class Table(BaseModel):
    """A table of a settings file: frozen, finite numbers only, no unknown keys."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, populate_by_name=True)

    @model_validator(mode="before")
    @classmethod
    def _known_keys_only(cls, given: Any) -> Any:
        if isinstance(given, dict):
            known = [field.alias or name for name, field in cls.model_fields.items()]
            for key in given:
                if key not in known and key not in cls.model_fields:
                    refuse("unknown_key", f"unknown key {key!r}", near_match(str(key), known))
        return given


def refuse(kind: str, what: str, mend: str) -> None:
    """Raise the error that pydantic carries to the reader, with its path added there.

    Raises:
        PydanticCustomError: always.
    """
    raise PydanticCustomError(kind, "{what}", {"what": what, "mend": mend})


def near_match(word: str, known: Sequence[str]) -> str:
    """Return a sentence that offers the known word nearest to a mistyped one, or all of them."""
    lower = {name.lower(): name for name in known}
    near = difflib.get_close_matches(word.lower(), list(lower), n=1, cutoff=0.55)
    if near:
        return f"Did you mean {lower[near[0]]!r}?"
    return "Known here: " + ", ".join(known) + "."


def value_path(loc: Sequence[str | int]) -> str:
    """Return `leg[0].joint[1].axis` for the location ("leg", 0, "joint", 1, "axis")."""
    words = ""
    for part in loc:
        if isinstance(part, int):
            words += f"[{part}]"
        else:
            words += f".{part}" if words else part
    return words


def as_file_error(file_name: str, error: ValidationError) -> FileFormatError:
    """Return the first of pydantic's findings as an error with file, path, value found and mend."""
    problems = error.errors(include_url=False)
    first = problems[0]
    parts = first["loc"]
    loc = value_path([part for i, part in enumerate(parts) if i == 0 or parts[i - 1] not in _TAGGED])
    context = first.get("ctx", {})
    what = first["msg"][:1].lower() + first["msg"][1:]
    found = first["input"]
    if first["type"] not in {"missing", "unknown_key"} and isinstance(found, int | float | str | list | tuple | bool):
        what += f", found {found!r}"
    if len(problems) > 1:
        what += f" (and {len(problems) - 1} more wrong in this file)"
    mend = context.get("mend") or _MENDS.get(first["type"], "Give a value as the message says.")
    return FileFormatError(where=f"{file_name}, {loc}" if loc else file_name, what=what, mend=str(mend))
