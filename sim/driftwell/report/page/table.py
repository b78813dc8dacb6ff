"""Tables with a caption, headings that say what they are of, and numbers that stand in line."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from driftwell.report.page.markup import Markup, joined, tag

Cell = Markup | str


@dataclass(frozen=True, slots=True)
class Column:
    """A column; `number` : whether its cells stand to the right."""

    title: Cell
    number: bool = False


def table(caption: Cell, columns: Sequence[Column], rows: Sequence[Sequence[Cell]]) -> Markup:
    """A table whose rows are named by their first cell; it scrolls by itself where it is wide."""
    head = tag(
        "tr",
        joined(
            tag("th", each.title, scope="col", class_="number" if each.number else None)
            for each in columns
        ),
    )
    lines = []
    for row in rows:
        cells = [tag("th", row[0], scope="row")]
        cells += [
            tag("td", cell, class_="number" if column.number else None)
            for column, cell in zip(columns[1:], row[1:], strict=True)
        ]
        lines.append(tag("tr", joined(cells)))
    made = tag("table", tag("caption", caption), tag("thead", head), tag("tbody", joined(lines)))
    return tag("div", made, class_="wide", tabindex="0", role="group", aria_label=_plain(caption))


def listed(rows: Sequence[tuple[Cell, Cell]]) -> Markup:
    """Names and what they stand for."""
    entries = (tag("div", tag("dt", name), tag("dd", what)) for name, what in rows)
    return tag("dl", joined(entries))


def _plain(caption: Cell) -> str:
    return "table" if isinstance(caption, Markup) else f"table: {caption}"
