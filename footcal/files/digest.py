"""SHA-256 of files and of canonical JSON, so that a result can name exactly what it came from."""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from footcal.errors import FileFormatError


def sha256_file(path: str | os.PathLike[str]) -> str:
    """Return the SHA-256 of a file's bytes, 64 lower-case hexadecimal digits.

    Raises:
        FileFormatError: the file can't be read.
    """
    try:
        with Path(path).open("rb") as opened:
            return hashlib.file_digest(opened, "sha256").hexdigest()
    except OSError as error:
        raise FileFormatError(
            where=str(path), what=f"can't be read ({error.strerror})", mend="Check the path and the permissions."
        ) from error


def sha256_files(paths: Iterable[Path]) -> str:
    """Return one SHA-256 over several files: of their names and digests, in order of name.

    The folder they lie in does not count, so a session can be moved or copied and keeps its digest.
    """
    listing = "".join(f"{sha256_file(path)}  {path.name}\n" for path in sorted(paths, key=lambda path: path.name))
    return hashlib.sha256(listing.encode()).hexdigest()


def canonical_json(value: Any) -> bytes:
    """Return JSON in the one form that is digested: keys sorted, no spaces, UTF-8, shortest round-trip floats.

    Raises:
        ValueError: a float is NaN or infinite; JSON has no word for it.
    """
    text = json.dumps(value, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    return text.encode()


def sha256_json(document: Mapping[str, Any], leave_out: Iterable[str] = ()) -> str:
    """Return the SHA-256 of a document's canonical JSON, some top-level keys (its own digest) left out."""
    left_out = frozenset(leave_out)
    return hashlib.sha256(canonical_json({k: v for k, v in document.items() if k not in left_out})).hexdigest()
