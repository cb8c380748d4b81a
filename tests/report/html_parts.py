"""Takes a report apart, so that tests can look at its pictures as a browser would."""

from __future__ import annotations

import base64
from dataclasses import dataclass, field
from html.parser import HTMLParser
from xml.etree import ElementTree as ET

SVG = "{http://www.w3.org/2000/svg}"
LINKS = ("href", "src", "srcset", "action", "poster", "data", "{http://www.w3.org/1999/xlink}href")


@dataclass
class Parts(HTMLParser):
    """What a page holds."""

    images: list[dict[str, str]] = field(default_factory=list)
    links: list[str] = field(default_factory=list)
    ids: list[str] = field(default_factory=list)
    words: list[str] = field(default_factory=list)
    tags: list[str] = field(default_factory=list)

    def __post_init__(self) -> None:
        super().__init__()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """Note a tag with its links."""
        given = {name: value or "" for name, value in attrs}
        self.tags.append(tag)
        self.links += [given[name] for name in LINKS if name in given]
        if "id" in given:
            self.ids.append(given["id"])
        if tag == "img":
            self.images.append(given)

    def handle_data(self, data: str) -> None:
        """Note words."""
        self.words.append(data)

    @property
    def text(self) -> str:
        """All words, single spaces between."""
        return " ".join(" ".join(self.words).split())


def parts_of(html: str) -> Parts:
    """Return the parts of a page."""
    parts = Parts()
    parts.feed(html)
    return parts


def svg_of(image: dict[str, str]) -> ET.Element:
    """Return the drawing inside an image's data URI."""
    head, data = image["src"].split(",", 1)
    assert head == "data:image/svg+xml;base64"
    return ET.fromstring(base64.b64decode(data))  # noqa: S314  (our own bytes)


def outside_links(html: str) -> list[str]:
    """Return everything the page or a picture in it would fetch from elsewhere."""
    parts = parts_of(html)
    found = [link for link in parts.links if not link.startswith(("#", "data:"))]
    for image in parts.images:
        for element in svg_of(image).iter():
            found += [element.attrib[name] for name in LINKS if not element.attrib.get(name, "#").startswith("#")]
    return found
