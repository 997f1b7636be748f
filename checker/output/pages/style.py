"""Say how a page looks on a screen and on A4 paper: black on white, nothing told by colour alone."""

from __future__ import annotations

import re

INK, PAPER, QUIET, SHADE, RULE, LINK = "#000000", "#ffffff", "#404040", "#f0f0f0", "#767676", "#0b3d91"

_SCREEN = f"""\
:root {{ color-scheme: light; }}
* {{ box-sizing: border-box; }}
html {{ background: {PAPER}; color: {INK}; }}
body {{ font: 1rem/1.45 system-ui, sans-serif; margin: 0 auto; max-width: 84rem; padding: 1rem; }}
h1, h2, h3, h4, p, li, dt, dd, caption, th {{ overflow-wrap: break-word; }}
h1 {{ font-size: 1.7rem; line-height: 1.2; margin: 0 0 .5rem; }}
h2 {{ border-top: .15rem solid {INK}; font-size: 1.3rem; margin: 2.5rem 0 .75rem; padding-top: .5rem; }}
h3 {{ font-size: 1.05rem; margin: 1.5rem 0 .5rem; }}
h4 {{ font-size: 1rem; margin: 0 0 .35rem; }}
p, li, dl {{ max-width: 60rem; }}
a {{ color: {LINK}; }}
:focus-visible {{ outline: .2rem solid {LINK}; outline-offset: .1rem; }}
.skip {{ background: {PAPER}; left: .5rem; padding: .5rem; position: absolute; top: -5rem; }}
.skip:focus {{ top: .5rem; }}
.indented {{ margin-left: 1.5rem; }}
.quiet {{ color: {QUIET}; }}
.answer {{ border: .2rem solid {INK}; margin: 1rem 0; padding: .75rem 1rem; }}
.answer p {{ margin: .25rem 0; }}
.answer strong {{ font-size: 1.4rem; }}
.caution {{ border: .1rem solid {INK}; border-left-width: .6rem; margin: 1rem 0; padding: .25rem 1rem; }}
.caution {{ max-width: 60rem; }}
nav ol {{ columns: 18rem; margin: 0; padding-left: 1.6rem; }}
nav li {{ padding: .2rem 0; }}
dl {{ margin: .5rem 0; }}
dl div {{ display: grid; gap: 0 .75rem; grid-template-columns: minmax(7rem, 11rem) minmax(0, 1fr); padding: .1rem 0; }}
dt {{ color: {QUIET}; }}
dd {{ margin: 0; overflow-wrap: anywhere; }}
article {{ border-left: .25rem solid {INK}; margin: 0 0 1.25rem; padding-left: .75rem; }}
article.accepted {{ border-left-style: double; border-left-width: .4rem; }}
.frame {{ margin: .75rem 0 1.5rem; overflow-x: auto; }}
table {{ border-collapse: collapse; font-size: .875rem; line-height: 1.35; min-width: 100%; }}
table.narrow {{ min-width: 0; }}
caption {{ font-weight: bold; padding: .25rem 0; text-align: left; }}
th, td {{ border: 1px solid {RULE}; padding: .25rem .45rem; text-align: left; vertical-align: top; }}
thead th, .over {{ background: {SHADE}; }}
tbody th {{ font-weight: 600; }}
.word {{ white-space: nowrap; }}
.long {{ overflow-wrap: anywhere; }}
.number {{ font-variant-numeric: tabular-nums; text-align: right; white-space: nowrap; }}
figure {{ margin: 1rem 0 2rem; }}
.drawing {{ border: 1px solid {RULE}; overflow: auto; }}
.drawing svg {{ display: block; height: auto; width: 100%; }}
.one-line svg {{ min-width: 120rem; }}
.piece, .on-paper {{ display: none; }}
.plot svg {{ max-width: 60rem; min-width: 40rem; }}
"""
_NARROW = """\
@media screen and (max-width: 48rem) {
table:not(.narrow) { min-width: 44rem; }
caption span { display: inline-block; left: 0; max-width: calc(100vw - 2rem); position: sticky; }
dl div { display: block; padding: .2rem 0; }
}
"""
_DEEPEST = 12
_DEEP = ", ".join(f".deep{n}" for n in range(1, _DEEPEST + 1)) + " { display: block; white-space: nowrap; }\n"
_DEPTHS = "".join(f".deep{n} {{ margin-left: {(n - 1) * 0.7:g}rem; }}\n" for n in range(1, _DEEPEST + 1))

_PRINT = """\
@page { margin: 13mm 12mm 15mm; size: A4; }
@page wide { size: A4 landscape; }
@media print {
body { font-size: 9.5pt; max-width: none; padding: 0; }
.skip { display: none; }
h1 { font-size: 17pt; }
h2 { font-size: 13pt; margin-top: 7mm; }
h3 { font-size: 10.5pt; }
h2, h3, h4, caption { break-after: avoid; }
.wide { break-before: page; page: wide; }
.wide > h2 { border-top: 0; margin-top: 0; padding-top: 0; }
p, li, dl, .caution { max-width: none; }
a { color: inherit; text-decoration: none; }
.frame, .drawing { overflow: visible; }
table { font-size: 7.5pt; width: 100%; }
table.narrow { width: auto; }
th, td { padding: .6mm 1mm; }
thead { display: table-header-group; }
tr, article, figure, .answer, .caution { break-inside: avoid; }
p, li { orphans: 3; widows: 3; }
.drawing { border: 0; }
.drawing svg { max-width: 100%; min-width: 0; }
.one-line svg { max-height: 168mm; }
.in-pieces { display: none; }
.piece, .on-paper { display: block; }
.piece { break-after: page; }
.piece svg { display: block; height: 236mm; margin: 0 auto; max-width: 100%; }
.wide .piece svg { height: 160mm; }
.plot svg { max-width: 148mm; }
figure { margin: 3mm 0; }
}
"""
_NOT_PLAIN = re.compile(r"[^A-Za-z0-9 ,.-]")


def deep(depth: int) -> str:
    """Return the class of a cell that stands in from the left by its depth, 1 for the top."""
    return f"deep{max(1, min(depth, _DEEPEST))}"


def css(foot: str) -> str:
    """Return the style of a page; `foot` stands at the foot of each printed sheet, without signs that could end it."""
    words = _NOT_PLAIN.sub("", foot)
    feet = f"""\
@page {{
@bottom-left {{ content: "{words}"; font: 7.5pt sans-serif; }}
@bottom-right {{ content: counter(page) " of " counter(pages); font: 7.5pt sans-serif; }}
}}
"""
    return _SCREEN + _DEEP + _DEPTHS + _NARROW + _PRINT + feet
