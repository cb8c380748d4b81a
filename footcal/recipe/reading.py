"""Reading a recipe: by path or by the name of a ready one, with its digest, bad values named by their path."""

from __future__ import annotations

import difflib
import hashlib
import os
import tomllib
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final

from pydantic import ValidationError

from footcal.errors import FileFormatError
from footcal.recipe.data import data_dir
from footcal.recipe.record import Part, Recipe

_MENDS: Final = {
    "missing": "Add the key; the ready recipes show where.",
    "extra_forbidden": "Take the key out, or correct its name.",
    "string_pattern_mismatch": "Use small letters, digits and underscores, a letter first.",
}


@dataclass(frozen=True, slots=True)
class ReadRecipe:
    """A recipe and where it came from."""

    recipe: Recipe
    path: Path
    sha256: str  # of the file's bytes


def read_recipe(path: str | os.PathLike[str]) -> ReadRecipe:
    """Return a checked recipe.

    Args:
        path: a TOML file; or the bare name of a ready recipe, such as `load_cell`, or of one on request only.

    Raises:
        FileFormatError: no such file, no TOML, or a bad value, whose path in the file is named.
    """
    found = _found(Path(path))
    try:
        content = found.read_bytes()
        document = tomllib.loads(content.decode("utf-8-sig"))
    except (OSError, ValueError, RecursionError) as error:
        raise FileFormatError(
            where=str(found), what=f"this is no recipe ({error})", mend="Start from a ready recipe, in TOML."
        ) from error
    return ReadRecipe(recipe_from(document, str(found)), found, hashlib.sha256(content).hexdigest())


def recipe_from(document: dict[str, Any], where: str) -> Recipe:
    """Return the checked recipe of a TOML document; `where` names the file in an error.

    Raises:
        FileFormatError: a bad value; the message names its path, such as `loading.targets[2]`.
    """
    try:
        return Recipe.model_validate(_tuples(document))
    except ValidationError as error:
        first = max(error.errors(include_url=False), key=lambda problem: len(problem["loc"]))  # nearest to the cause
        path = _path(first["loc"])
        raise FileFormatError(
            where=f"{where}, {path}" if path else where, what=_what(first), mend=_mend(first)
        ) from error


def ready_recipes() -> dict[str, Path]:
    """Return the recipes that come with footcal, less those on request only: name → path, in order of name.

    Raises:
        FileFormatError: the folder is missing, or a recipe in it is damaged.
    """
    return {name: path for name, path in _all_ready().items() if not read_recipe(path).recipe.on_request}


def _all_ready() -> dict[str, Path]:
    return {path.stem: path for path in sorted(data_dir("recipes").glob("*.toml"))}


def _found(path: Path) -> Path:
    if path.suffix or path.exists() or path.parent != Path():
        return path
    every = _all_ready()
    if path.name in every:
        return every[path.name]
    ready = ready_recipes()  # one that is on request only is not offered to who mistypes
    near = difflib.get_close_matches(path.name, list(ready), n=1)
    raise FileFormatError(
        where=str(path),
        what="there is no ready recipe of that name",
        mend=f"Did you mean {near[0]}?" if near else f"Ready are {', '.join(ready)}.",
    )


def _tuples(value: Any) -> Any:
    """Turn TOML's lists into tuples, which is what frozen records hold."""
    if isinstance(value, dict):
        return {key: _tuples(part) for key, part in value.items()}
    if isinstance(value, list):
        return tuple(_tuples(part) for part in value)
    return value


def _path(loc: Sequence[str | int]) -> str:
    words = ""
    for part in loc:
        if isinstance(part, int):
            words += f"[{part}]"
        elif part not in {"str", "ColumnScale", "constrained-str"}:
            words += f".{part}" if words else part
    return words


def _what(problem: Any) -> str:
    message = str(problem["msg"]).removeprefix("Value error, ")
    if problem["type"] in {"missing", "extra_forbidden"}:
        return "this key is missing" if problem["type"] == "missing" else "there is no such key"
    return f"{_plain(problem['input'])} is refused: {message[:1].lower() + message[1:]}"


def _plain(value: Any) -> str:
    shown = list(value) if isinstance(value, tuple) else value
    text = "this table" if isinstance(value, dict | Part) else repr(shown)
    return text if len(text) <= 80 else text[:77] + "…"


def _mend(problem: Any) -> str:
    if problem["type"] == "extra_forbidden":
        known = _known_keys(problem["loc"][:-1])
        near = difflib.get_close_matches(str(problem["loc"][-1]), known, n=1, cutoff=0.6)
        return f"Did you mean {near[0]!r}?" if near else f"Known here: {', '.join(known)}."
    return _MENDS.get(
        problem["type"], "Correct the value; units stand in the names of the keys, shares go from 0 to 1."
    )


def _known_keys(table: Sequence[str | int]) -> list[str]:
    model: Any = Recipe
    for name in table:
        field = model.model_fields.get(name) if isinstance(name, str) else None
        model = field.annotation if field else Recipe
    return list(getattr(model, "model_fields", Recipe.model_fields))
