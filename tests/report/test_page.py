"""The page itself: self-contained, readable without seeing, and safe against markup in names."""

from __future__ import annotations

from pathlib import Path

import pytest

from footcal.errors import SettingError
from footcal.report.page import CAUTION, Page, Picture, Section, Table, page_html, picture, write_page
from footcal.report.style import new_figure
from tests.report.html_parts import SVG, outside_links, parts_of, svg_of


def drawn() -> Picture:
    """Return a picture of a straight line."""
    figure = new_figure()
    figure.subplots().plot([0.0, 1.0], [0.0, 1.0])
    return picture(figure, "line", "A line", "A straight line from 0 to 1.")


def page(name: str = "foot") -> Page:
    """Return a small page."""
    table = Table("Errors", ("load", "error"), ((name, "0.1"),))
    return Page(name, "kicker", "lead", (("U", "±1 N"),), (Section("Result", tables=(table,), pictures=(drawn(),)),))


def test_page_needs_nothing_from_elsewhere() -> None:
    """Neither the page nor a picture in it links outside, and there is no script."""
    html = page_html(page())

    assert outside_links(html) == []
    assert "script" not in parts_of(html).tags
    assert "@import" not in html


def test_picture_is_an_svg_with_words_for_it() -> None:
    """Each picture is a drawing of its own with a text that stands for it."""
    (image,) = parts_of(page_html(page())).images

    assert image["alt"] == "A straight line from 0 to 1."
    assert svg_of(image).tag == f"{SVG}svg"


def test_equal_figures_make_equal_bytes() -> None:
    """A report holds no time stamp and no random names in its pictures, so that two runs can be compared."""
    assert drawn().svg == drawn().svg


def test_name_with_markup_stays_text() -> None:
    """A foot called like a tag is shown, not obeyed."""
    html = page_html(page("<b>&foot"))

    assert "b" not in parts_of(html).tags
    assert "<b>&foot" in parts_of(html).text


def test_caution_stands_on_every_page() -> None:
    """No page goes out without the safety words."""
    assert CAUTION in parts_of(page_html(page())).text


def test_page_is_written_whole(tmp_path: Path) -> None:
    """The file ends as HTML does, and no neighbour is left behind."""
    write_page(page(), tmp_path / "report.html")

    assert [path.name for path in tmp_path.iterdir()] == ["report.html"]
    assert (tmp_path / "report.html").read_text(encoding="utf-8").rstrip().endswith("</html>")


def test_page_that_cannot_be_written_is_refused(tmp_path: Path) -> None:
    """A folder in place of a file is a clear error."""
    with pytest.raises(SettingError, match="this is a folder"):
        write_page(page(), tmp_path)
