"""`make speed`: each row is a ratio in one run against a general-purpose peer or our own batch code."""

from __future__ import annotations

import numpy as np
from rich.console import Console
from rich.table import Table

from tests.speed.rows import ROWS


def main() -> None:
    """Measure every row and print the table; a gate is the ratio that must not be passed."""
    table = Table(title="Speed, ratios in one run (thread CPU time, interleaved, median of 9)")
    for name, side in (("what", "left"), ("ratio", "right"), ("gate", "right"), ("met", "left"), ("measured", "left")):
        table.add_column(name, justify=side)  # type: ignore[arg-type]
    for row in ROWS:
        ratio, words = row.measure()
        good = np.isfinite(ratio) and (ratio >= row.gate if row.at_least else ratio <= row.gate)
        sign = "≥" if row.at_least else "≤"
        table.add_row(row.what, f"{ratio:.3g}", f"{sign} {row.gate:g}", "yes" if good else "NO", words)
    Console(width=140).print(table)


if __name__ == "__main__":
    main()
