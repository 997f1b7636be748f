"""Read a page as a strict reader would: every element closed where it was opened, and what stands in it."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from html.parser import HTMLParser

VOID = ("meta", "use", "rect", "circle", "line", "polyline", "polygon", "path")


@dataclass
class Element:
    """Hold an element: its name, its attributes, what it holds, and all the text in it."""

    tag: str
    attributes: dict[str, str]
    children: list[Element] = field(default_factory=list)
    words: list[str] = field(default_factory=list)

    def walk(self) -> list[Element]:
        """Return the element and all in it, in order."""
        return [self, *(inner for child in self.children for inner in child.walk())]

    def all(self, *tags: str) -> list[Element]:
        """Return the elements of some names in it."""
        return [one for one in self.walk() if one.tag in tags]

    def with_id(self, name: str) -> Element:
        """Return the one element with an id."""
        (found,) = [one for one in self.walk() if one.attributes.get("id") == name]
        return found

    @property
    def text(self) -> str:
        """Return the text in it."""
        return "".join(self.words)

    def rows(self) -> list[list[str]]:
        """Return the cells of the rows of a table."""
        return [[cell.text for cell in row.children] for row in self.all("tr")]


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.root = Element("", {})
        self.open = [self.root]
        self.declarations: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        names = Counter(name for name, _ in attrs)
        assert max(names.values(), default=1) == 1, (tag, names)
        element = Element(tag, {name: value or "" for name, value in attrs})
        self.open[-1].children.append(element)
        if tag not in VOID:
            self.open.append(element)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        assert tag in VOID, tag
        self.handle_starttag(tag, attrs)

    def handle_endtag(self, tag: str) -> None:
        assert self.open[-1].tag == tag, f"</{tag}> closes <{self.open[-1].tag}>"
        self.open.pop()

    def handle_data(self, data: str) -> None:
        for element in self.open:
            element.words.append(data)

    def handle_decl(self, decl: str) -> None:
        self.declarations.append(decl)

    def handle_comment(self, data: str) -> None:
        raise AssertionError(f"a comment: {data}")

    def handle_pi(self, data: str) -> None:
        raise AssertionError(f"an instruction: {data}")

    def unknown_decl(self, data: str) -> None:
        raise AssertionError(f"a declaration: {data}")


def read(page: str) -> Element:
    """Return the page's root element; fail where anything is not closed or is no element or text."""
    reader = _Reader()
    reader.feed(page)
    reader.close()
    assert reader.declarations == ["DOCTYPE html"]
    assert reader.open == [reader.root]
    (html,) = reader.root.children
    return html
