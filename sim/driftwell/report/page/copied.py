"""A command that can be copied with one press, without a network."""

from __future__ import annotations

from driftwell.report.page.markup import Markup, tag


def to_copy(command: str, name: str) -> Markup:
    """A command with a button that copies it; `name` : its id in the page."""
    return tag(
        "div",
        tag("pre", tag("code", command, id=name)),
        tag("button", "Copy", type="button", data_copy=name, hidden=True),
        class_="copied",
    )
