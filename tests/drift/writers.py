"""What the processes of the history's tests do."""

from __future__ import annotations

from pathlib import Path

from footcal.drift.history import History
from tests.drift.stand_in import new_check


def add_many(history: Path, first: int, count: int, log: Path) -> None:
    """Add checks one by one; after each has been stored, append its number to a log."""
    with History(history) as store, log.open("a", buffering=1) as done:
        for number in range(first, first + count):
            store.add([new_check(number)])
            done.write(f"{number}\n")
