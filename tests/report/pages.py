"""A report as a reader of HTML finds it: its elements, its text, and whether it is whole."""

from __future__ import annotations

import re
from html.parser import HTMLParser

VOID = {"meta", "link", "img", "br", "hr", "input"}


class Page(HTMLParser):
    """Elements with their attributes, the text within each, and whether every tag that opens also closes."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.elements: list[tuple[str, dict[str, str | None]]] = []
        self.texts: list[str] = []
        self.open: list[str] = []
        self.feed(text)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)
        if tag in ("td", "th", "dt", "dd", "caption", "li", "span", "p"):
            self.texts.append(" ")

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open and self.open[-1] not in ("style", "script"):
            self.texts.append(data)

    @property
    def text(self) -> str:
        return re.sub(r"\s+", " ", "".join(self.texts))

    def all(self, *tags: str) -> list[dict[str, str | None]]:
        return [attributes for tag, attributes in self.elements if tag in tags]


def section(text: str, id_: str) -> Page:
    """The section of a page with this id."""
    match = re.search(rf'<section id="{id_}".*?</section>', text, re.DOTALL)
    assert match, f"no section {id_}"
    return Page(match[0])
