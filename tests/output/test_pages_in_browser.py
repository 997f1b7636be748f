"""The pages in a real browser, where one is installed: nothing wider than the screen, and nothing cut on paper."""

from __future__ import annotations

import html
import re
import shutil
import subprocess
from pathlib import Path

import pytest

from tests.output.test_pages import FLEET, HOSTILE_FLEET, HOSTILE_HULL, written

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
pytestmark = pytest.mark.skipif(BROWSER is None, reason="no browser is installed")

PHONE, DESKTOP = 390, 1280
MEASURE = """
const frame = document.querySelector("iframe");
frame.onload = () => {
  const page = frame.contentDocument, wide = page.documentElement.clientWidth, out = [];
  for (const one of page.body.querySelectorAll("*")) {
    if (one.closest("svg") || one.classList.contains("skip")) continue;
    if (one.parentElement.closest(".frame, .drawing")) continue;
    const box = one.getBoundingClientRect();
    if (box.width && (box.right > wide + 0.5 || box.left < -0.5)) out.push(one.tagName + "." + one.className);
  }
  document.body.dataset.found = JSON.stringify([page.documentElement.scrollWidth, wide, out.slice(0, 5)]);
};
"""
"""Runs beside the page, in a document around it: the page itself runs nothing."""


def dumped(folder: Path, page: str, width: int) -> str:
    """Return what the browser makes of a page in a frame of some width: width of all, of the frame, what stands out."""
    around = folder / "around.html"
    shown = html.escape(page)
    around.write_text(
        f'<!DOCTYPE html><body><iframe style="border:0;width:{width}px;height:900px"></iframe>'
        f"<script>{MEASURE}</script>"
        f"<textarea hidden>{shown}</textarea>"
        '<script>frame.srcdoc = document.querySelector("textarea").value;</script></body>',
        encoding="utf-8",
    )
    assert BROWSER is not None
    done = subprocess.run(
        [BROWSER, "--headless", "--no-sandbox", "--disable-gpu", "--hide-scrollbars", f"--user-data-dir={folder / 'profile'}",
         "--virtual-time-budget=20000", "--dump-dom", around.as_uri()],
        capture_output=True, text=True, encoding="utf-8", timeout=120, check=True,
    )  # fmt: skip
    found = re.search(r'data-found="([^"]*)"', done.stdout)
    assert found is not None, done.stderr[-2000:]
    return html.unescape(found[1])


@pytest.mark.parametrize("width", [PHONE, DESKTOP])
@pytest.mark.parametrize("name", ["TND-031", "TND-038", FLEET, HOSTILE_HULL, HOSTILE_FLEET])
def test_the_page_is_never_wider_than_the_screen(name: str, width: int, tmp_path: Path) -> None:
    assert dumped(tmp_path, written(name)[2], width) == f"[{width},{width},[]]"


def test_a_page_that_is_too_wide_is_seen(tmp_path: Path) -> None:
    wide = written(FLEET)[2].replace("<main>", '<main><div class="wide-one" style="width:700px">x</div>')
    found = dumped(tmp_path, wide, PHONE)
    assert found.startswith("[7")
    assert "DIV.wide-one" in found
