"""The public names, and how quickly the command line answers."""

from __future__ import annotations

import subprocess
import sys

import pytest

import footcal


def test_every_public_name_resolves() -> None:
    """`__all__`, `dir(footcal)` and what can really be imported are the same."""
    assert sorted(footcal.__all__) == sorted(dir(footcal))
    assert all(getattr(footcal, name) is not None for name in footcal.__all__)


def test_an_unknown_name_is_an_attribute_error() -> None:
    """The lazy lookup refuses what is not in the table."""
    with pytest.raises(AttributeError, match="no attribute 'nonsense'"):
        footcal.nonsense  # noqa: B018


def test_help_imports_no_heavy_library() -> None:
    """`footcal --help` must not wait for numba, pandas, scipy, sklearn, pyarrow or matplotlib."""
    code = (
        "import sys; sys.argv = ['footcal', '--help']\n"
        "from footcal.cli.main import run\n"
        "try: run()\n"
        "except SystemExit: pass\n"
        "heavy = {'numba', 'pandas', 'scipy', 'sklearn', 'pyarrow', 'matplotlib'} & set(sys.modules)\n"
        "sys.stderr.write(','.join(sorted(heavy)))\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr == ""
