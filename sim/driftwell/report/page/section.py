"""A section of a page: what stands in the table of contents and what it holds."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.report.page.markup import Markup, joined, tag


@dataclass(frozen=True, slots=True)
class Section:
    """One section.

    name : its id in the page; title : its heading
    """

    name: str
    title: str
    body: Markup

    @property
    def markup(self) -> Markup:
        """The section with its heading."""
        heading = tag("h2", self.title, id=f"{self.name}-title")
        return tag(
            "section", heading, self.body, id=self.name, aria_labelledby=f"{self.name}-title"
        )


def contents(sections: list[Section]) -> Markup:
    """The table of contents."""
    entries = (tag("li", tag("a", each.title, href=f"#{each.name}")) for each in sections)
    return tag(
        "nav",
        tag("p", "On this page", class_="contents-title", id="contents-title"),
        tag("ol", joined(entries)),
        class_="contents",
        aria_labelledby="contents-title",
    )


def folded(summary: str, *content: Markup | str) -> Markup:
    """What is shown only where somebody wants to see it."""
    return tag("details", tag("summary", summary), *content)


def paragraphs(*sentences: Markup | str) -> Markup:
    """Each in a paragraph of its own."""
    return joined(tag("p", each) for each in sentences)
