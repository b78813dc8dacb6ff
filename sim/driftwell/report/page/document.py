"""The whole page: one HTML document that needs nothing besides itself."""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from hashlib import sha256
from importlib.resources import files

from driftwell._version import __version__
from driftwell.report.page.markup import NOTHING, Markup, joined, tag, together
from driftwell.report.page.section import Section, contents


@dataclass(frozen=True, slots=True)
class Page:
    """What a document holds.

    kind : what the report is of, in a word or two
    verdict : what stands at the top, to be taken in at a glance
    styles, scripts : of parts that bring their own; trusted
    """

    title: str
    kind: str
    verdict: Markup
    sections: Sequence[Section]
    styles: tuple[str, ...] = ()
    scripts: tuple[str, ...] = ()


def document(page: Page) -> str:
    """The text of the page; the same page gives the same text."""
    scripts = [_own("page.js"), *page.scripts]
    styles = [_own("page.css"), *page.styles]
    sections = list(page.sections)
    body = tag(
        "body",
        tag("a", "To the report", href="#report", class_="skip"),
        _header(page),
        tag(
            "div",
            contents(sections),
            tag(
                "main",
                page.verdict,
                joined(each.markup for each in sections),
                id="report",
                tabindex="-1",
            ),
            class_="columns",
        ),
        _footer(),
        joined(tag("script", Markup(text)) for text in scripts),
    )
    head = tag(
        "head",
        tag("meta", charset="utf-8"),
        tag("meta", http_equiv="Content-Security-Policy", content=_policy(scripts)),
        tag("meta", name="viewport", content="width=device-width, initial-scale=1"),
        tag("meta", name="color-scheme", content="light dark"),
        tag("meta", name="generator", content=f"driftwell {__version__}"),
        tag("title", f"{page.title} - driftwell report"),
        tag("link", rel="icon", href="data:,"),
        joined(tag("style", Markup(text)) for text in styles),
    )
    return f"<!doctype html>\n{tag('html', head, body, lang='en')}\n"


def _header(page: Page) -> Markup:
    """Title, and the button for the colours, which a script shows."""
    return tag(
        "header",
        tag("p", f"driftwell report of a {page.kind}", class_="kind"),
        tag("h1", page.title),
        tag("button", "Colours: as the system", type="button", id="colours", hidden=True),
    )


def _footer() -> Markup:
    words = (
        f"Written by driftwell {__version__} from the record alone. This page is one file and loads"
        " nothing from elsewhere: it can be sent, kept and printed as it is."
    )
    return tag("footer", tag("p", words))


def _policy(scripts: Sequence[str]) -> str:
    """Nothing is loaded from anywhere, and no script runs but those written here."""
    digests = " ".join(
        f"'sha256-{b64encode(sha256(text.encode()).digest()).decode()}'" for text in scripts
    )
    return (
        "default-src 'none'; img-src data: blob:; style-src 'unsafe-inline'; "
        f"script-src {digests}; base-uri 'none'; form-action 'none'"
    )


@cache
def _own(name: str) -> str:
    """A file that lies beside this one."""
    return files("driftwell.report.page").joinpath(name).read_text("utf-8")


def verdict_box(word: str, sentence: str, mark: str, kind: str, *more: Markup | str) -> Markup:
    """What is seen first.

    mark : a sign that says the same as the colour; kind : good, fair or bad
    """
    return tag(
        "div",
        tag(
            "p",
            tag("span", mark, class_="mark", aria_hidden="true"),
            tag("strong", word),
            class_="word",
        ),
        tag("p", sentence),
        together(*more) if more else NOTHING,
        class_=f"verdict {kind}",
        role="region",
        aria_label="verdict",
    )
