"""A real browser for tests of pages: opened from disk, with what went wrong collected.

Debian's Chromium is driven through playwright. Where no browser is on the machine the tests are
skipped, unless ``DRIFTWELL_NEEDS_BROWSER`` is set: then they fail.
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest

OPTIONS = (
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
"""Without a sandbox it runs as root, as in containers; nothing of it goes to the network."""

WIDTH, HEIGHT = 1280, 800


@dataclass
class Opened:
    """A page that was opened, and what has gone wrong in it since.

    page : playwright's page
    complaints : errors and warnings of the console, uncaught exceptions and dialogues
    requests : addresses that were asked for, besides the page's own
    """

    page: Any
    complaints: list[str] = field(default_factory=list)
    requests: list[str] = field(default_factory=list)

    def value(self, expression: str) -> Any:
        """What a JavaScript expression, or function, gives in the page."""
        return self.page.evaluate(expression)


def browser_path() -> str:
    """The browser on this machine; skips the test, or fails it, where there is none."""
    found = os.environ.get("CHROMIUM") or shutil.which("chromium") or shutil.which("chrome")
    missing = ""
    if not found:
        missing = "no Chromium on this machine; install it, or name it in CHROMIUM"
    try:
        import playwright.sync_api  # noqa: F401
    except ImportError:
        missing = "playwright is missing: pip install 'driftwell[test]'"
    if missing and os.environ.get("DRIFTWELL_NEEDS_BROWSER"):
        pytest.fail(missing)
    if missing:
        pytest.skip(missing)
    return str(found)


@contextmanager
def browser() -> Iterator[Any]:
    """A browser for several pages, closed afterwards."""
    path = browser_path()
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        started = driver.chromium.launch(executable_path=path, args=list(OPTIONS))
        try:
            yield started
        finally:
            started.close()


@contextmanager
def opened(started: Any, path: Path, **context: Any) -> Iterator[Opened]:
    """The page in a file, opened by its ``file://`` address.

    started : a browser, from :func:`browser`
    context : options of playwright's new_context, such as ``color_scheme="dark"``
    """
    settings = {"viewport": {"width": WIDTH, "height": HEIGHT}, **context}
    held = started.new_context(**settings)
    try:
        found = Opened(held.new_page())
        address = path.resolve().as_uri()
        found.page.on("console", lambda said: _note(found, said))
        found.page.on("pageerror", lambda fault: found.complaints.append(f"exception: {fault}"))
        found.page.on("dialog", lambda shown: _dismiss(found, shown))
        found.page.on("request", lambda asked: _asked(found, address, asked.url))
        found.page.goto(address, wait_until="load")
        yield found
    finally:
        held.close()


def _note(found: Opened, said: Any) -> None:
    if said.type in {"error", "warning"}:
        found.complaints.append(f"{said.type}: {said.text}")


def _dismiss(found: Opened, shown: Any) -> None:
    found.complaints.append(f"dialogue: {shown.message}")
    shown.dismiss()


def _asked(found: Opened, address: str, url: str) -> None:
    inline = url.startswith(("data:", "blob:"))
    if not inline and url.partition("#")[0] != address:
        found.requests.append(url)
