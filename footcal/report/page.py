"""One self-contained HTML page: words, tables and pictures in, one file out that needs no network."""

from __future__ import annotations

import base64
import io
import os
from dataclasses import dataclass, field
from functools import cache

import jinja2
import matplotlib as mpl
from matplotlib.figure import Figure

from footcal import __version__
from footcal.files.atomic import replacing

CAUTION = (
    "No output of footcal is a safety function. Weights fall, powered legs move: keep hands and feet clear, secure the "
    "robot on a stand, never load a sensor beyond its safe limit. Local codes and licensed practice come first."
)


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture with all that a reader without it needs."""

    name: str  # short, unique in the page; also a file name
    title: str
    alt: str  # what is to be seen, in words and figures
    svg: bytes
    caption: str = ""
    wide: bool = False  # over the whole width of the page

    @property
    def source(self) -> str:
        """The picture as a data URI."""
        return "data:image/svg+xml;base64," + base64.b64encode(self.svg).decode("ascii")


@dataclass(frozen=True, slots=True)
class Table:
    """A table of ready-made words."""

    caption: str
    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    left: tuple[int, ...] = (0,)  # columns of words; the others are figures


@dataclass(frozen=True, slots=True)
class Section:
    """A part of the page."""

    heading: str
    words: tuple[str, ...] = ()
    facts: tuple[tuple[str, str], ...] = ()
    tables: tuple[Table, ...] = ()
    pictures: tuple[Picture, ...] = ()


@dataclass(frozen=True, slots=True)
class Page:
    """The whole page."""

    title: str
    kicker: str  # one short line above the title
    lead: str
    figures: tuple[tuple[str, str], ...]  # the numbers that matter most, with what they are
    sections: tuple[Section, ...]
    cautions: tuple[str, ...] = (CAUTION,)
    invented: bool = False  # true: data made by a simulator, said so at the top
    footer: tuple[str, ...] = field(default_factory=lambda: (f"Written by footcal {__version__}.",))


def picture(figure: Figure, name: str, title: str, alt: str, *, caption: str = "", wide: bool = False) -> Picture:
    """Return a drawn figure as a picture for a page.

    Args:
        figure: drawn.
        name: short, unique in the page.
        title: stands over the picture.
        alt: says in words and figures what is to be seen.
        caption: stands under it.
        wide: over the whole width of the page.
    """
    buffer = io.BytesIO()
    with mpl.rc_context({"svg.hashsalt": name, "svg.fonttype": "path"}):
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return Picture(name, title, alt, buffer.getvalue(), caption, wide)


@cache
def _template() -> jinja2.Template:
    environment = jinja2.Environment(
        loader=jinja2.PackageLoader("footcal.report", "templates"),
        autoescape=True,
        trim_blocks=True,
        lstrip_blocks=True,
        undefined=jinja2.StrictUndefined,
    )
    return environment.get_template("page.html.j2")


def page_html(page: Page) -> str:
    """Return the page as HTML text."""
    return _template().render(page=page)


def write_page(page: Page, path: str | os.PathLike[str]) -> None:
    """Write the page; the file appears whole or not at all.

    Raises:
        SettingError: the place can't be written.
    """
    text = page_html(page)
    with replacing(path) as temporary:
        temporary.write_text(text, encoding="utf-8")
