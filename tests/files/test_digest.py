"""Digests name exactly what a result came from."""

from __future__ import annotations

from pathlib import Path

import pytest

from footcal.errors import FileFormatError
from footcal.files.digest import canonical_json, sha256_file, sha256_files, sha256_json

# Reference: FIPS 180-4 example, SHA-256 of "abc".
ABC = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"


def test_the_digest_of_a_file_is_the_published_one(tmp_path: Path) -> None:
    """The three bytes "abc" give the digest of the standard."""
    (tmp_path / "a").write_bytes(b"abc")
    assert sha256_file(tmp_path / "a") == ABC


def test_a_missing_file_is_refused(tmp_path: Path) -> None:
    """No digest is made up for a file that is not there."""
    with pytest.raises(FileFormatError, match="nothing"):
        sha256_file(tmp_path / "nothing")


def test_canonical_json_sorts_keys_and_leaves_no_space() -> None:
    """Two spellings of one document are one sequence of bytes."""
    # Reference, by hand.
    assert canonical_json({"b": [1, 2.5], "a": "é"}) == '{"a":"é","b":[1,2.5]}'.encode()


def test_nan_has_no_canonical_form() -> None:
    """JSON has no word for NaN, so it is refused."""
    with pytest.raises(ValueError, match="JSON"):
        canonical_json({"a": float("nan")})


def test_the_digest_field_is_left_out_of_its_own_digest() -> None:
    """Writing the digest into the document does not change it."""
    plain = {"a": 1}
    assert sha256_json({**plain, "digest": "x"}, leave_out=["digest"]) == sha256_json(plain)


def test_several_files_keep_their_digest_when_moved_but_not_when_renamed(tmp_path: Path) -> None:
    """The folder does not count, the names do."""
    for folder, name in (("one", "a"), ("two", "a"), ("three", "b")):
        (tmp_path / folder).mkdir()
        (tmp_path / folder / name).write_bytes(b"abc")
    digests = [sha256_files((tmp_path / folder).iterdir()) for folder in ("one", "two", "three")]
    assert digests[0] == digests[1] != digests[2]
