"""The site is built from the pages without a warning, hangs together and needs no network."""

from __future__ import annotations

import re
import subprocess
import sys
from html.parser import HTMLParser
from pathlib import Path
from urllib.parse import unquote

import pytest

ROOT = Path(__file__).resolve().parents[2]
PAGES = sorted((ROOT / "docs").rglob("*.md"))
pytest.importorskip("sphinx")


class Page(HTMLParser):
    """What a page of the site refers to, what it loads, and its anchors."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.links: list[str] = []
        self.loaded: list[str] = []
        self.anchors: set[str] = set()
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        found = {name: value or "" for name, value in attrs}
        self.anchors |= {found[name] for name in ("id", "name") if name in found}
        if tag == "a" and "href" in found:
            self.links.append(found["href"])
        elif tag == "link" and "href" in found:
            self.loaded.append(found["href"])
        self.loaded += [
            found[name] for name in ("src", "srcset", "data", "poster") if name in found
        ]


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Built once, in a folder of its own; warnings are errors."""
    place = tmp_path_factory.mktemp("site")
    build = [sys.executable, "-m", "sphinx", "-W", "-q", "-b", "html", "-d", str(place / "read")]
    command = [*build, "docs", str(place / "site")]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert (0, "") == (done.returncode, done.stderr)
    return place / "site"


@pytest.fixture(scope="module")
def pages(site: Path) -> dict[Path, Page]:
    return {path: Page(path.read_text(encoding="utf-8")) for path in site.rglob("*.html")}


def test_every_page_is_in_the_site_and_in_its_table_of_contents(
    site: Path, pages: dict[Path, Page]
) -> None:
    linked = {
        (site / unquote(link.split("#")[0])).resolve() for link in pages[site / "index.html"].links
    }
    for page in PAGES:
        built = site / page.relative_to(ROOT / "docs").with_suffix(".html")
        assert built in pages
        assert built == site / "index.html" or built in linked, f"{page.name} is in no toctree"


def test_every_link_within_the_site_leads_to_a_file_and_an_anchor(pages: dict[Path, Page]) -> None:
    lost = []
    for path, page in pages.items():
        for link in [*page.links, *page.loaded]:
            if re.match(r"[a-z]+:", link):
                continue
            file, _, anchor = unquote(link).partition("#")
            target = (path.parent / file.split("?")[0]).resolve() if file else path
            anchors = pages[target].anchors if target in pages else {anchor}
            if not target.is_file() or (anchor and anchor not in anchors):
                lost.append(f"{path.name}: {link}")
    assert [] == lost


def test_no_page_loads_anything_from_a_network(site: Path, pages: dict[Path, Page]) -> None:
    away = re.compile(r"(?:https?:)?//")
    loaded = [f"{path.name}: {each}" for path, page in pages.items() for each in page.loaded]
    assert [] == [each for each in loaded if away.match(each.split(": ", 1)[1])]
    for style in site.rglob("*.css"):
        found = re.findall(r"(?:url\(|@import)\s*['\"]?((?:https?:)?//[^'\")]*)", style.read_text())
        assert [] == found, style.name


def test_what_is_looked_for_is_seen() -> None:
    """A page that loads from elsewhere, and one whose link has no anchor, are told apart."""
    page = Page('<a href="b.html#c" id="d">e</a><script src="https://example.org/f.js"></script>')
    assert (["b.html#c"], ["https://example.org/f.js"], {"d"}) == (
        page.links,
        page.loaded,
        page.anchors,
    )
