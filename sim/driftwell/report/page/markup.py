"""Markup as a value of its own: text gets into a page only escaped.

:func:`tag` takes text and :class:`Markup`; text is escaped, markup is not. Whatever is read from a
file, or said by a user, is text, so there is no way for it to become part of the page's structure.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from html import escape

_EMPTY = frozenset({"meta", "link", "img", "br", "hr", "input", "col", "wbr"})
"""Elements of HTML that have no end."""


@dataclass(frozen=True, slots=True)
class Markup:
    """A piece of a page that is whole in itself: all tags closed, all text in it escaped."""

    text: str

    def __str__(self) -> str:
        return self.text


NOTHING = Markup("")


def tag(element: str, /, *content: Markup | str, **attributes: str | bool | None) -> Markup:
    """An element of a page.

    content : markup as it is, text escaped
    attributes : values are escaped; True stands alone, None and False are left out. A name is
        written with `-` for `_`, and a trailing `_` (`class_`, `for_`) is dropped.
    """
    opened = f"<{element}{''.join(map(_attribute, attributes.items()))}>"
    if element in _EMPTY:
        return Markup(opened)
    return Markup(f"{opened}{together(*content)}</{element}>")


def together(*content: Markup | str) -> Markup:
    """Pieces one after another."""
    return Markup(
        "".join(each.text if isinstance(each, Markup) else safe(each) for each in content)
    )


def joined(content: Iterable[Markup | str], between: Markup | str = "") -> Markup:
    """Pieces with something between them."""
    parts: list[Markup | str] = []
    for each in content:
        parts += [between, each] if parts else [each]
    return together(*parts)


def coded(text: str) -> Markup:
    """Text in which what stands between backticks is set as code."""
    parts = text.split("`")
    if len(parts) % 2 == 0:
        return together(text)
    return together(*(tag("code", each) if k % 2 else each for k, each in enumerate(parts)))


def safe(text: str) -> str:
    """Text as it may stand in a page, or in quotes as the value of an attribute."""
    return escape(readable(text), quote=True)


def readable(text: str) -> str:
    """Text with what cannot be seen, or would turn what is around it, written out: ``\\u202e``.

    Bytes of file names that are no text are written out too.
    """
    if text.isascii() and text.isprintable():
        return text
    text = text.encode(errors="backslashreplace").decode()
    return "".join(c if c.isprintable() or c in "\n\t" else f"\\u{ord(c):04x}" for c in text)


def _attribute(pair: tuple[str, str | bool | None]) -> str:
    name, value = pair
    name = name.removesuffix("_").replace("_", "-")
    if value is None or value is False:
        return ""
    return f" {name}" if value is True else f' {name}="{safe(value)}"'
