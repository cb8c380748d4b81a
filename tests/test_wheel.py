"""The wheel, as a stranger gets it: built, installed into an empty environment, and run from another folder."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from tests.report.html_parts import outside_links

pytestmark = pytest.mark.slow

CHECKOUT = Path(__file__).resolve().parents[1]


def called(*command: str | Path, folder: Path) -> subprocess.CompletedProcess[str]:
    """Run a command in a folder, with nothing of the checkout on its path."""
    clean = {name: value for name, value in os.environ.items() if not name.startswith(("PYTHON", "VIRTUAL_ENV"))}
    return subprocess.run(
        [str(part) for part in command],
        cwd=folder,
        env={**clean, "COLUMNS": "160"},
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.fixture(scope="module")
def python(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the interpreter of a fresh environment that holds the wheel and what it asks for, nothing else."""
    folder = tmp_path_factory.mktemp("wheel")
    built = called(sys.executable, "-m", "build", "--wheel", "--outdir", folder, CHECKOUT, folder=folder)
    assert built.returncode == 0, built.stderr
    (wheel,) = folder.glob("*.whl")
    subprocess.run([sys.executable, "-m", "venv", str(folder / "env")], check=True)
    interpreter = folder / "env" / "bin" / "python"
    installed = called(
        interpreter, "-m", "pip", "install", "--quiet", "--disable-pip-version-check", wheel, folder=folder
    )
    assert installed.returncode == 0, installed.stderr
    return interpreter


def test_installed_package_does_not_see_the_checkout(python: Path, tmp_path: Path) -> None:
    """What is imported lies in the fresh environment."""
    found = called(python, "-c", "import footcal; print(footcal.__file__)", folder=tmp_path)

    assert found.returncode == 0, found.stderr
    assert Path(found.stdout.strip()).is_relative_to(python.parents[1])


def test_demo_runs_from_the_wheel_in_another_folder(python: Path, tmp_path: Path) -> None:
    """`footcal demo` ends with 0, prints its tables, flags the bad foot, and leaves a report that stands alone."""
    done = called(python.parent / "footcal", "demo", folder=tmp_path)

    assert done.returncode == 0, done.stderr
    assert all(foot_id in done.stdout for foot_id in ("LC-0417", "LC-0388", "SP-0032", "SP-0071"))
    assert "recalibrate" in done.stdout
    assert "nan" not in done.stdout.lower().split()
    assert "safety function" in done.stderr
    report = tmp_path / "demo" / "report.html"
    assert outside_links(report.read_text(encoding="utf-8")) == []
