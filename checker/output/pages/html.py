"""Write HTML in which data can be nothing but text.

A plain string is data wherever it stands: it is escaped, and what cannot be printed is spelled.
Only what `tag` has made, and a drawing that is taken as `Markup`, is markup.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from html import escape
from typing import NamedTuple

from checker.output.csv_table import Cell, Table
from checker.output.csv_table import number as printed
from checker.reading.words import flat


@dataclass(frozen=True, slots=True)
class Markup:
    """Hold text that is HTML already."""

    text: str


Content = str | Markup
LONG_WORD = 22
"""Signs from which on a word in a table may be broken."""
_BLOCKS = frozenset(
    ("article", "caption", "dd", "div", "dl", "figure", "footer", "h1", "h2", "h3", "h4", "header", "li", "main", "nav",
     "ol", "p", "section", "table", "tbody", "thead", "tr", "ul")
)  # fmt: skip


def text(content: Content) -> str:
    """Return content as HTML: markup as it is, data escaped."""
    return content.text if isinstance(content, Markup) else escape(flat(content))


def tag(name: str, *content: Content, **attributes: str) -> Markup:
    """Return an element. An attribute that is a word of Python is written with an underscore behind it."""
    facts = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{text(value)}"' for key, value in attributes.items() if value
    )
    end = "\n" if name in _BLOCKS else ""
    return Markup(f"<{name}{facts}>{''.join(map(text, content))}</{name}>{end}")


def joined(content: Iterable[Content], between: Content = "") -> Markup:
    """Return pieces of content one after the other."""
    return Markup(text(between).join(map(text, content)))


def link(anchor: str, *content: Content) -> Markup:
    """Return a link to a place on the page: there are no others."""
    return tag("a", *content, href=f"#{anchor}")


class Section(NamedTuple):
    """Hold a section of a page; a wide one is printed on paper on its side."""

    anchor: str
    title: str
    content: tuple[Content, ...]
    is_wide: bool = False

    @property
    def markup(self) -> Markup:
        """Return the section with its heading."""
        heading, name = f"{self.anchor}-title", "wide" if self.is_wide else ""
        return tag("section", tag("h2", self.title, id=heading), *self.content, id=self.anchor, class_=name,
                   aria_labelledby=heading)  # fmt: skip


def contents(sections: Iterable[Section]) -> Markup:
    """Return the list of sections with links to them."""
    title = tag("h2", "Contents", id="contents-title")
    links = (tag("li", link(one.anchor, one.title)) for one in sections)
    return tag("nav", title, tag("ol", *links), id="contents", aria_labelledby="contents-title")


def paragraph(*content: Content, class_: str = "") -> Markup:
    """Return a paragraph."""
    return tag("p", *content, class_=class_)


def bullets(items: Iterable[Content]) -> Markup:
    """Return a list."""
    return tag("ul", *(tag("li", item) for item in items))


def facts(rows: Iterable[tuple[str, Content]]) -> Markup:
    """Return names with what is told of them."""
    return tag("dl", *(tag("div", tag("dt", name), tag("dd", told)) for name, told in rows))


def lines(rows: Iterable[str]) -> Iterator[Markup]:
    """Return lines of text as paragraphs; those that stand in from the left do so here."""
    yield from (paragraph(row.strip(), class_="indented" if row.startswith(" ") else "") for row in rows)


TableCell = Cell | Markup


def table(
    anchor: str, caption: str, headings: Sequence[str], rows: Iterable[Sequence[TableCell]], *, narrow: bool = False
) -> Markup:
    """Return a table in a frame of its own that scrolls where the screen is narrow.

    The first cell of each row heads it. `narrow` is for few short columns, which are not stretched.
    """
    return grouped_table(anchor, caption, headings, [("", rows)], narrow=narrow)


def grouped_table(
    anchor: str, caption: str, headings: Sequence[str],
    groups: Iterable[tuple[str, Iterable[Sequence[TableCell]]]], *, narrow: bool = False,
) -> Markup:  # fmt: skip
    """Return a table whose rows stand in groups, each under its title where it has one."""
    head = tag("thead", tag("tr", *(tag("th", heading, scope="col") for heading in headings)))
    bodies = (_body(title, rows, len(headings)) for title, rows in groups)
    whole = tag("table", tag("caption", tag("span", caption), id=f"{anchor}-caption"), head, *bodies,
                class_="narrow" if narrow else "")  # fmt: skip
    return tag("div", whole, id=anchor, class_="frame", role="group", tabindex="0", aria_labelledby=f"{anchor}-caption")


def _body(title: str, rows: Iterable[Sequence[TableCell]], columns: int) -> Markup:
    over = [tag("tr", tag("th", title, scope="rowgroup", colspan=str(columns), class_="over"))] if title else []
    return tag("tbody", *over, *(tag("tr", *_cells(row)) for row in rows))


def _cells(row: Sequence[TableCell]) -> Iterator[Markup]:
    for place, cell in enumerate(row):
        is_number = isinstance(cell, (int, float))
        content: Content = "" if cell is None else printed(cell) if isinstance(cell, (int, float)) else cell
        is_word = isinstance(content, str) and len(content) < LONG_WORD and " " not in content
        if isinstance(content, str):
            content = _breakable(content)
        if place == 0:
            yield tag("th", content, scope="row", class_="word" if is_word else "")
        else:
            yield tag("td", content, class_="number" if is_number else "")


def _breakable(words: str) -> Content:
    """Let a word that is wider than a column ought to be break anywhere; the others stay whole."""
    parts = words.split(" ")
    if all(len(part) < LONG_WORD for part in parts):
        return words
    return joined((tag("span", part, class_="long") if len(part) >= LONG_WORD else part for part in parts), " ")


def columns(source: Table, wanted: Sequence[str]) -> list[tuple[Cell, ...]]:
    """Return some columns of a list by their headings."""
    places = [source.headings.index(name) for name in wanted]
    return [tuple(row[place] for place in places) for row in source.rows]


def page(title: str, css: str, *body: Content) -> str:
    """Return a whole page. It loads nothing and runs nothing, and tells the browser so."""
    policy = "default-src 'none'; style-src 'unsafe-inline'"
    return "".join((
        "<!DOCTYPE html>\n",
        '<html lang="en">\n<head>\n<meta charset="utf-8">\n',
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">\n',
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n',
        text(tag("title", title)), "\n",
        f"<style>\n{css}</style>\n</head>\n<body>\n",
        text(tag("a", "Skip to the page's contents", class_="skip", href="#contents")), "\n",
        *map(text, body),
        "</body>\n</html>\n",
    ))  # fmt: skip
