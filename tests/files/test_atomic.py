"""Files appear whole or not at all."""

from __future__ import annotations

from pathlib import Path

import pytest

from footcal.errors import SettingError
from footcal.files.atomic import replacing


def write(path: Path, text: str) -> None:
    """Write text through `replacing`."""
    with replacing(path) as temporary:
        temporary.write_text(text)


def fail_half_way(path: Path) -> None:
    """Write half a file, then meet an error."""
    with replacing(path) as temporary:
        temporary.write_text("half")
        raise RuntimeError


def test_a_finished_write_replaces_the_old_file(tmp_path: Path) -> None:
    """After the block, the name holds the new content and nothing else lies beside it."""
    path = tmp_path / "a.txt"
    path.write_text("old")
    write(path, "new")
    assert path.read_text() == "new"
    assert list(tmp_path.iterdir()) == [path]


def test_a_failed_write_leaves_the_old_file_and_no_litter(tmp_path: Path) -> None:
    """An error inside the block changes nothing on the disk."""
    path = tmp_path / "a.txt"
    path.write_text("old")
    with pytest.raises(RuntimeError):
        fail_half_way(path)
    assert path.read_text() == "old"
    assert list(tmp_path.iterdir()) == [path]


def test_a_member_of_a_new_folder_can_be_written(tmp_path: Path) -> None:
    """Missing parent folders are made."""
    write(tmp_path / "feet" / "SP-1" / "a.txt", "x")
    assert (tmp_path / "feet" / "SP-1" / "a.txt").read_text() == "x"


def test_a_symbolic_link_stays_a_link(tmp_path: Path) -> None:
    """The file behind the link is replaced, the link itself is not."""
    (tmp_path / "real.txt").write_text("old")
    (tmp_path / "link.txt").symlink_to("real.txt")
    write(tmp_path / "link.txt", "new")
    assert (tmp_path / "link.txt").is_symlink()
    assert (tmp_path / "real.txt").read_text() == "new"


def test_the_mode_of_a_replaced_file_is_kept(tmp_path: Path) -> None:
    """A file that others could not read stays so."""
    path = tmp_path / "a.txt"
    path.write_text("old")
    path.chmod(0o600)
    write(path, "new")
    assert path.stat().st_mode & 0o777 == 0o600


@pytest.mark.parametrize("name", ["", "file.txt/inside.txt"])
def test_a_place_that_can_hold_no_file_is_refused_with_its_name(tmp_path: Path, name: str) -> None:
    """A folder, or a path through a file, is refused before anything is written."""
    (tmp_path / "file.txt").write_text("old")
    with pytest.raises(SettingError, match=r"tmp|file"):
        write(tmp_path / name, "new")
    assert (tmp_path / "file.txt").read_text() == "old"
