"""Printing for all commands: data to stdout, talk to stderr, tables that fit the screen, progress for long work."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from rich.console import Console


def out() -> Console:
    """Return the console for data (stdout); NO_COLOR is respected."""
    from rich.console import Console

    return Console(file=sys.stdout, highlight=False, soft_wrap=not sys.stdout.isatty())


def talk() -> Console:
    """Return the console for talk (stderr): progress, notes, cautions."""
    from rich.console import Console

    return Console(file=sys.stderr, highlight=False, soft_wrap=not sys.stderr.isatty())


def print_json(document: Any) -> None:
    """Print one JSON document to stdout; NaN becomes null."""
    import orjson

    text = orjson.dumps(document, option=orjson.OPT_INDENT_2 | orjson.OPT_SERIALIZE_NUMPY)
    sys.stdout.write(text.decode() + "\n")


def print_table(title: str, header: Sequence[str], rows: Iterable[Sequence[str]], *, left: int = 1) -> None:
    """Print a table to stdout; the first `left` columns are words, the others figures."""
    from rich.box import SIMPLE
    from rich.table import Table

    table = Table(title=title, title_justify="left", title_style="bold", box=SIMPLE, pad_edge=False)
    for number, name in enumerate(header):
        table.add_column(name, justify="left" if number < left else "right", overflow="fold")
    for row in rows:
        table.add_row(*row)
    out().print(table)


@contextmanager
def progress(words: str, total: float | None = None) -> Iterator[Any]:
    """Show progress on stderr while long work goes on; yields a function that takes the amount done so far.

    Args:
        words: what is being done.
        total: amount of the whole work; None where it is not known.
    """
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn, TimeRemainingColumn

    columns = (TextColumn("{task.description}"), BarColumn(), TimeElapsedColumn(), TimeRemainingColumn())
    with Progress(*columns, console=talk(), transient=True, disable=not sys.stderr.isatty()) as bar:
        task = bar.add_task(words, total=total)

        def done(amount: float, description: str | None = None) -> None:
            bar.update(task, completed=amount, description=description or words)

        yield done
