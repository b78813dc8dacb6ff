"""Pages in a real browser: no complaint, no request, the buttons do what they say."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from driftwell.record.reader import Run
from driftwell.report.run_page.page import run_page
from tests.browser import browser, opened

CONTRAST = """() => {
  const numbers = (text) => text.match(/[\\d.]+/g).map(Number);
  const light = (rgb) => {
    const [r, g, b] = rgb.slice(0, 3).map((c) => c / 255)
      .map((c) => c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4);
    return 0.2126 * r + 0.7152 * g + 0.0722 * b;
  };
  const ground = (node) => {
    for (let at = node; at; at = at.parentElement) {
      const found = numbers(getComputedStyle(at).backgroundColor);
      if (found.length < 4 || found[3] > 0) return found;
    }
    return [255, 255, 255];
  };
  const worst = { ratio: 99, text: "" };
  const all = "p, h1, h2, h3, a, td, th, dt, dd, button, summary, code, figcaption, caption";
  for (const node of document.querySelectorAll(all)) {
    if (!node.offsetParent || node.closest(".dwp") || !node.textContent.trim()) continue;
    const [a, b] = [numbers(getComputedStyle(node).color), ground(node)].map(light);
    const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (ratio < worst.ratio) Object.assign(worst, { ratio, text: node.textContent.slice(0, 40) });
  }
  return worst;
}"""
"""The least contrast of text, by the formula of WCAG 2 (relative luminance; from memory)."""


@pytest.fixture(scope="module")
def page(run_of: Callable[[str], Run], tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("shown") / "report.html"
    path.write_text(run_page(run_of("trap")), "utf-8")
    return path


def test_a_page_opens_without_complaint_in_both_themes_and_on_a_narrow_screen(page: Path) -> None:
    with browser() as started:
        for scheme, width in (("light", 1280), ("dark", 400)):
            view = {"width": width, "height": 800}
            with opened(started, page, color_scheme=scheme, viewport=view) as shown:
                assert [] == shown.complaints
                assert [] == shown.requests
                assert width == shown.value("document.documentElement.scrollWidth")
                worst = shown.value(CONTRAST)
                assert 4.5 <= worst["ratio"], worst
                assert 2000 < len(shown.page.screenshot())

        with opened(started, page, color_scheme="light") as shown:
            paper = "getComputedStyle(document.body).backgroundColor"
            light = shown.value(paper)
            button = shown.page.locator("#colours")
            button.focus()
            for words, dark in (("light", False), ("dark", True), ("as the system", False)):
                shown.page.keyboard.press("Enter")
                assert f"Colours: {words}" == button.inner_text()
                assert dark == (light != shown.value(paper))
            assert [] == shown.complaints


def test_a_command_is_copied_and_folds_open_for_print(page: Path, tmp_path: Path) -> None:
    text = page.read_text("utf-8")
    assert "It was made by a program" in text
    other = tmp_path / "copied.html"
    other.write_text(_with_a_command(), "utf-8")
    with browser() as started, opened(started, other) as shown:
        shown.page.keyboard.press("Tab")
        assert "#report" == shown.value("document.activeElement.getAttribute('href')")
        shown.page.locator("button[data-copy]").click()
        shown.page.wait_for_function(
            "document.querySelector('button[data-copy]').textContent !== 'Copy'"
        )
        chosen = shown.value("getSelection().toString()")
        told = shown.page.locator("button[data-copy]").inner_text()
        assert told == "Copied" or chosen == "driftwell run a.toml"
        shown.value("dispatchEvent(new Event('beforeprint'))")
        assert shown.value("document.querySelector('details').open")
        shown.value("dispatchEvent(new Event('afterprint'))")
        assert not shown.value("document.querySelector('details').open")
        assert [] == shown.complaints


def _with_a_command() -> str:
    from driftwell.report.page.copied import to_copy
    from driftwell.report.page.document import Page, document, verdict_box
    from driftwell.report.page.markup import together
    from driftwell.report.page.section import Section, folded

    body = together(to_copy("driftwell run a.toml", "command"), folded("more", "less"))
    verdict = verdict_box("Finished", "Well.", "✓", "good")
    return document(Page("A title", "run", verdict, [Section("one", "One", body)]))
