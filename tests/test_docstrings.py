"""The examples in the docstrings, run as they stand."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import footcal


def test_every_docstring_example_gives_what_it_shows() -> None:
    """All modules but the one that runs when imported as a program."""
    tried = 0
    for found in pkgutil.walk_packages(footcal.__path__, "footcal."):
        if found.name.endswith("__main__") or "._data" in found.name:
            continue
        result = doctest.testmod(importlib.import_module(found.name))
        assert result.failed == 0, found.name
        tried += result.attempted
    assert tried >= 2
