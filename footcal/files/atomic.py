"""Files appear whole or not at all: temporary neighbour, fsync, rename."""

from __future__ import annotations

import os
import secrets
import stat
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from footcal.errors import SettingError


@contextmanager
def replacing(path: str | os.PathLike[str]) -> Iterator[Path]:
    """Yield a temporary neighbour of `path`; on success it becomes `path`, on any failure it is removed.

    The neighbour keeps the suffixes of `path`. Missing parent folders are made, so members of a new folder can be
    written one by one. A symbolic link keeps pointing where it did: the file behind it is replaced. A device or a pipe
    (`/dev/stdout`) is written to directly, since it can't be renamed over.

    Args:
        path: the file to write or to replace.

    Yields:
        The path to write to.

    Raises:
        SettingError: the folder can't be made or written, or `path` is a folder.
    """
    target = Path(os.path.realpath(path))
    if target.is_dir():
        raise SettingError(
            where=str(path), what="this is a folder, a file name is needed", mend="Name a file inside it."
        )
    if target.exists() and not stat.S_ISREG(target.stat().st_mode):
        yield target
        return
    temporary = _neighbour(target, path)
    try:
        yield temporary
        _settle(temporary, target)
    finally:
        with suppress(FileNotFoundError):
            temporary.unlink()
    fsync_folder(target.parent)


def fsync_folder(folder: Path) -> None:
    """Make the names in a folder (a rename, a new file) last through a power cut."""
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _neighbour(target: Path, named: str | os.PathLike[str]) -> Path:
    temporary = target.with_name(f".{secrets.token_hex(6)}.{target.name}")
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        temporary.touch(exist_ok=False)
    except OSError as error:
        raise SettingError(
            where=str(named),
            what=f"can't write here ({error.strerror or error})",
            mend="Choose a folder that you may write to, with room left.",
        ) from error
    return temporary


def _settle(temporary: Path, target: Path) -> None:
    with temporary.open("rb+") as written:
        os.fsync(written.fileno())
    if target.exists():
        temporary.chmod(stat.S_IMODE(target.stat().st_mode))
    temporary.replace(target)
