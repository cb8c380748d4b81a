"""Reading the tables of outside figures that lie beside this file."""

import csv
from pathlib import Path

HERE = Path(__file__).parent


def rows(name: str) -> list[dict[str, str]]:
    """Return the rows of a table, head lines with a # left out."""
    with (HERE / name).open(encoding="utf-8") as lines:
        return list(csv.DictReader(line for line in lines if not line.startswith("#")))
