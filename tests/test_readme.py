"""The README's Python example, run as it stands."""

from __future__ import annotations

import doctest
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


def test_the_python_example_gives_what_it_shows(monkeypatch: pytest.MonkeyPatch) -> None:
    """Run from the project's folder, as the README does."""
    monkeypatch.chdir(ROOT)
    failed, tried = doctest.testfile(str(ROOT / "README.md"), module_relative=False)
    assert tried >= 4
    assert failed == 0


def test_every_command_shown_exists() -> None:
    """Each `footcal WORD` in the README is a command."""
    from footcal.cli.main import COMMANDS

    text = (ROOT / "README.md").read_text(encoding="utf-8")
    shown = {line.split()[2] for line in text.splitlines() if line.startswith("$ footcal ")}
    assert shown
    assert shown <= set(COMMANDS)
